"""`specgate explain`: what a measure, an approximation or a rule means, its formula, range and source."""

from __future__ import annotations

import argparse
import shutil
import sys
import textwrap
from collections.abc import Mapping
from typing import TYPE_CHECKING

from specgate.cli import status

if TYPE_CHECKING:
    from specgate.review.types import DefinitionReview


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `explain`."""
    parser.add_argument("name", metavar="NAME", nargs="?", help="a name as it stands in a project or in a finding")
    parser.epilog = "without NAME: the list of all that can be explained"


def run(options: argparse.Namespace) -> int:
    """Print the text on one name, or all names."""
    from specgate.review.definitions import all_definitions
    from specgate.terms.names import nearest

    known = all_definitions()
    width = min(100, shutil.get_terminal_size((100, 24)).columns)
    if options.name is None:
        print(_listing(known))
        return status.PASSES
    definition = known.get(options.name)
    if definition is None:
        meant = nearest(options.name, known)
        hint = f"; did you mean {meant}?" if meant else "; `specgate explain` lists all names"
        print(f"specgate: nothing is called {options.name}{hint}", file=sys.stderr)
        return status.UNUSABLE
    print(_page(options.name, definition, width))
    return status.PASSES


def _listing(known: Mapping[str, DefinitionReview]) -> str:
    longest = max(map(len, known))
    blocks = []
    for kind in dict.fromkeys(definition.kind for definition in known.values()):
        rows = [f"  {name:{longest}}  {row.title}" for name, row in known.items() if row.kind == kind]
        blocks.append("\n".join([f"{kind}:", *rows]))
    return "\n\n".join(blocks)


def _page(name: str, definition: DefinitionReview, width: int) -> str:
    parts = [f"{name} ({definition.kind}): {definition.title}"]
    parts += [_wrapped(paragraph, width) for paragraph in definition.text.strip().split("\n\n")]
    if definition.source:
        parts.append(_wrapped(f"Source: {definition.source}", width))
    return "\n\n".join(parts)


def _wrapped(paragraph: str, width: int) -> str:
    """Fill running text; keep lists (indented lines) as they are, each line wrapped under itself."""
    lines = paragraph.splitlines()
    if any(line.startswith(" ") for line in lines):
        return "\n".join(
            textwrap.fill(line, width, subsequent_indent=" " * (len(line) - len(line.lstrip()) + 2)) for line in lines
        )
    return textwrap.fill(" ".join(lines), width)
