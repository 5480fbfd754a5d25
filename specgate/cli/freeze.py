"""`specgate freeze`: a baseline of a project, to compare later runs with."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from specgate.cli import status
from specgate.cli.terminal import colour, progress, width

_EXAMPLES = """\
a baseline holds what every link of the trace stood on, and the result:
  specgate freeze my_project -o baseline.json                     when a revision is released
  specgate check my_project --baseline baseline.json              stale links are findings
  specgate check my_project --baseline baseline.json --only-new   the gate holds on what got worse since
  specgate diff baseline.json my_project                          everything that is otherwise since"""


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `freeze`."""
    parser.add_argument("project", metavar="PROJECT", help="a folder with a specgate.yaml, or one YAML file")
    parser.add_argument("-o", "--output", metavar="FILE", required=True, help="the baseline (JSON); - is the terminal")
    parser.add_argument(
        "--baseline", metavar="FILE", help="the baseline before: links that are stale since stay stale in the new one"
    )
    parser.epilog = _EXAMPLES


def run(options: argparse.Namespace) -> int:
    """Judge the project and write its baseline; the gate may hold, the project has to be buildable."""
    from specgate.cli.baselines import read
    from specgate.cli.files import write
    from specgate.exchange import baseline
    from specgate.intake.load import Problems, load
    from specgate.report import terminal
    from specgate.review.build import unusable
    from specgate.review.freeze import freeze
    from specgate.review.types import Unusable

    before = None if options.baseline is None else read(options.baseline)
    with progress("reading and computing"):
        loaded = load(Path(options.project))
        frozen = unusable(loaded) if isinstance(loaded, Problems) else freeze(loaded, before)
    if isinstance(frozen, Unusable):
        text = terminal.render(frozen, width=width(sys.stderr), colour=colour("auto", sys.stderr))
        print(text, end="", file=sys.stderr)
        print(f"specgate: no baseline was written to {options.output}", file=sys.stderr)
        return status.UNUSABLE
    write(options.output, baseline.write(frozen).encode())
    if options.output != "-":
        about = frozen.result.project
        links = sum(map(len, frozen.links.values()))
        print(f"{options.output}: a baseline of {about.id} revision {about.revision} with {links} links")
    return status.PASSES
