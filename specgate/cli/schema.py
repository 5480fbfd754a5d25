"""`specgate schema`: the JSON Schemas, for editors and for readers of results."""

from __future__ import annotations

import argparse
from importlib.resources import files

FILES = {"project": "specgate.schema.json", "results": "results.schema.json"}


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `schema`."""
    parser.add_argument(
        "which",
        nargs="?",
        choices=tuple(FILES),
        default="project",
        help="of the project files (default) or of the results that `check --format json` prints",
    )
    parser.epilog = (
        "for completion in an editor, write it beside the project and name it in the first line of specgate.yaml:\n"
        "  specgate schema > specgate.schema.json\n"
        "  # yaml-language-server: $schema=./specgate.schema.json"
    )


def text(which: str) -> str:
    """Return the text of a schema: `project` or `results`."""
    return (files("specgate.schemas") / FILES[which]).read_text(encoding="utf-8")


def run(options: argparse.Namespace) -> int:
    """Print the schema."""
    print(text(options.which), end="")
    return 0
