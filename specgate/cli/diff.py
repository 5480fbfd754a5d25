"""`specgate diff`: two revisions side by side."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.cli import status
from specgate.cli.terminal import colour, progress, width
from specgate.terms.errors import UnusableProblem

if TYPE_CHECKING:
    from specgate.cli.sides import NotBuilt
    from specgate.revisions.types import Differences

FORMATS = ("text", "json", "html", "pdf")
_SIDES = """\
OLD and NEW are each one of
  a project        a folder with a specgate.yaml, or one YAML file; it is computed
  a result         FILE.json, as `check --format json` writes it, or a baseline, as `freeze` writes it
  a report         FILE.pdf, as `report` writes it: the result that it carries is read
  REV:path         the project at a path of a git revision (v1.2:hoist, HEAD~3:, main:./hoist); nothing is checked out

worse is
  a verdict that fell (compliant, open, non-compliant), a standing that fell (sound, inconclusive, out of range), a
  requirement that no longer applies or is gone, a new finding of level error, and a gate that passed and now holds;
  a smaller reserve alone is a change, not worse

exit status:
  0    nothing got worse
  1    something did
  2    one of the two, or the call, is unusable; the reasons are printed
  3    the environment is unfit: a missing system library, a file that cannot be written
  70   specgate itself broke; please report it"""


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `diff`."""
    parser.add_argument("old", metavar="OLD", help="the revision to compare with")
    parser.add_argument("new", metavar="NEW", help="the revision that is looked at")
    parser.add_argument("--format", choices=FORMATS, help="what to write (default: by the name of FILE, else text)")
    parser.add_argument("-o", "--output", metavar="FILE", default="-", help="write to FILE instead of the terminal")
    parser.add_argument(
        "--color",
        "--colour",
        choices=("auto", "always", "never"),
        default="auto",
        dest="colour",
        help="colour in text (default: auto, only on a terminal; NO_COLOR is respected)",
    )
    parser.epilog = _SIDES


def run(options: argparse.Namespace) -> int:
    """Read both sides, compare them, write the differences, and return the exit status."""
    chosen = options.format or _by_name(options.output)
    if chosen == "pdf" and options.output == "-":
        raise UnusableProblem("a PDF goes to a file: -o FILE.pdf")
    from specgate.cli.files import write
    from specgate.cli.sides import NotBuilt

    try:
        found = compared(options.old, options.new)
    except NotBuilt as problem:
        return _not_built(problem)
    write(options.output, _written(found, chosen, options))
    if options.output != "-":
        print(f"{options.output}: {'something got worse' if found.worse else 'nothing got worse'}")
    return status.HOLDS if found.worse else status.PASSES


def compared(old: str, new: str) -> Differences:
    """Return the differences of what two texts name. Raises what `side` raises."""
    import specgate
    from specgate.cli.sides import side
    from specgate.exchange.foreign import alike
    from specgate.review.types import ToolReview
    from specgate.revisions.compare import differences

    before, after = side(old), side(new)
    unknown = before.unknown | after.unknown
    tool = ToolReview("specgate", specgate.__version__)
    sides = alike(before.review, unknown), alike(after.review, unknown)
    return differences(*sides, tool=tool, remarks=(*before.remarks, *after.remarks))


def _by_name(output: str) -> str:
    suffix = Path(output).suffix.lower().removeprefix(".")
    return suffix if suffix in FORMATS else "text"


def _not_built(problem: NotBuilt) -> int:
    from specgate.report import terminal

    print(f"specgate: {problem.name} cannot be compared:", file=sys.stderr)
    text = terminal.render(problem.result, width=width(sys.stderr), colour=colour("auto", sys.stderr))
    print(text, end="", file=sys.stderr)
    return status.UNUSABLE


def _written(found: Differences, chosen: str, options: argparse.Namespace) -> bytes:
    if chosen == "json":
        from specgate.exchange import differences

        return differences.write(found).encode()
    if chosen == "text":
        from specgate.report.revisions import terminal

        on_screen = options.output == "-"
        return terminal.render(
            found,
            width=width(sys.stdout) if on_screen else 120,
            colour=colour(options.colour, sys.stdout) if on_screen else options.colour == "always",
        ).encode()
    with progress("laying out the differences"):
        if chosen == "html":
            from specgate.report.revisions import page

            return page.on_screen(found).encode()
        from specgate.exchange import differences
        from specgate.report.revisions import paper

        return paper.render(found, differences.write(found).encode())
