"""`specgate check`: verdicts and findings, in words or as JSON."""

from __future__ import annotations

import argparse
import sys

from specgate.cli import status, today
from specgate.cli.baselines import add_options, chosen
from specgate.cli.terminal import colour, width

_MATRICES = ("verification-csv", "allocation-csv", "coverage-csv")
"""As in `exchange.matrices`, which is not imported before it is needed."""


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `check`."""
    parser.add_argument("project", metavar="PROJECT", help="a folder with a specgate.yaml, or one YAML file")
    parser.add_argument(
        "--format",
        choices=("text", "json", *_MATRICES),
        default="text",
        help="what to print (default: text); matrices of verification and allocation, and coverage, for spreadsheets",
    )
    parser.add_argument(
        "--proof", action="store_true", help="with --format json: say of every bounded result how it was obtained"
    )
    parser.add_argument(
        "--formulas",
        action="store_true",
        help="put every formula of the catalogue to every response, break and loop: which hold, which not",
    )
    add_options(parser)
    parser.add_argument("-o", "--output", metavar="FILE", default="-", help="write to FILE instead of the terminal")
    parser.add_argument(
        "--color",
        "--colour",
        choices=("auto", "always", "never"),
        default="auto",
        dest="colour",
        help="colour in text (default: auto, only on a terminal; NO_COLOR is respected)",
    )
    today.add(parser)
    parser.epilog = status.EXPLAINED


def run(options: argparse.Namespace) -> int:
    """Judge the project, print, and return the exit status."""
    from specgate.cli.files import write
    from specgate.cli.judge import judge
    from specgate.review.types import Unusable

    if options.proof and options.format != "json":
        print("specgate: --proof goes with --format json: the text has no room for records", file=sys.stderr)
        return status.UNUSABLE
    judged = judge(
        options.project,
        drawn=options.format == "json",
        proof=options.proof,
        formulas=options.formulas,
        today=options.date,
        since=chosen(options),
    )
    if options.format == "json":
        from specgate.exchange import json

        text = json.write(judged.review)
    elif options.format in _MATRICES and not isinstance(judged.review, Unusable):
        from specgate.exchange.matrices import MATRICES

        text = MATRICES[options.format](judged.review)
    else:
        from specgate.report import terminal

        on_screen = options.output == "-"
        text = terminal.render(
            judged.review,
            width=width(sys.stdout) if on_screen else 120,
            colour=colour(options.colour, sys.stdout) if on_screen else options.colour == "always",
        )
    write(options.output, text.encode())
    return judged.status
