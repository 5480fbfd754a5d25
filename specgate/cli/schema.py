"""`specgate schema`: the JSON Schemas, for editors and for readers of results."""

from __future__ import annotations

import argparse
import re
from importlib.resources import files

FILES = {
    "project": "specgate.schema.json",
    "results": "results.schema.json",
    "differences": "differences.schema.json",
    "baseline": "baseline.schema.json",
}

_NAMED = re.compile(r'"#/\$defs/(\w+)"')
"""A definition that is referred to; those that a schema does not hold itself are those of the results."""


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `schema`."""
    parser.add_argument(
        "which",
        nargs="?",
        choices=tuple(FILES),
        default="project",
        help="of the project files (default), of what `check` and `diff` write as JSON, or of what `freeze` writes",
    )
    parser.epilog = (
        "for completion in an editor, write it beside the project and name it in the first line of specgate.yaml:\n"
        "  specgate schema > specgate.schema.json\n"
        "  # yaml-language-server: $schema=./specgate.schema.json"
    )


def text(which: str) -> str:
    """Return the text of a schema, by its name in FILES; it needs no other file."""
    own = _read(which)
    if which in ("project", "results"):
        return own
    import json

    schema, shared = json.loads(own), json.loads(_read("results"))["$defs"]
    while missing := sorted(set(_NAMED.findall(json.dumps(schema))) - schema["$defs"].keys()):
        schema["$defs"] |= {name: shared[name] for name in missing}
    return json.dumps(schema, indent=2, ensure_ascii=False) + "\n"


def _read(which: str) -> str:
    return (files("specgate.schemas") / FILES[which]).read_text(encoding="utf-8")


def run(options: argparse.Namespace) -> int:
    """Print the schema."""
    print(text(options.which), end="")
    return 0
