"""The commands, one row each. A command's module is imported only when it is needed."""

from __future__ import annotations

import argparse
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from importlib import import_module
from types import MappingProxyType


@dataclass(frozen=True)
class Command:
    """A row: name, what it does in one line, and the module with `configure(parser)` and `run(options)`."""

    name: str
    summary: str
    module: str

    def configure(self, parser: argparse.ArgumentParser) -> None:
        """Add the command's arguments, examples and cautions to its parser."""
        import_module(self.module).configure(parser)

    @property
    def run(self) -> Callable[[argparse.Namespace], int]:
        """The function that does it and returns the exit status."""
        return import_module(self.module).run  # type: ignore[no-any-return]


_ROWS = (
    Command("check", "validate, compute and judge a project; print verdicts and findings", "specgate.cli.check"),
    Command("report", "write the compliance report that people sign (PDF or HTML)", "specgate.cli.report"),
    Command("diff", "compare two revisions: what changed, what that did, and what got worse", "specgate.cli.diff"),
    Command("freeze", "write a baseline: what the links of the trace stand on, and the result", "specgate.cli.freeze"),
    Command("trace", "show a requirement with all above and below it, and what shows it", "specgate.cli.trace"),
    Command("explain", "say what a measure, an approximation or a rule means, and its source", "specgate.cli.explain"),
    Command("new", "make a small project that passes, to start from", "specgate.cli.new"),
    Command("schema", "print the JSON Schema of the project files, for editors", "specgate.cli.schema"),
)

COMMANDS: Mapping[str, Command] = MappingProxyType({row.name: row for row in _ROWS})
