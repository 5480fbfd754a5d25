"""`specgate trace`: a requirement with all above and below it, its limits, basis, evidence and waivers."""

from __future__ import annotations

import argparse
import sys

from specgate.cli import status, today
from specgate.cli.terminal import colour, width


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `trace`."""
    parser.add_argument("id", metavar="ID", help="a requirement of the project")
    parser.add_argument("project", metavar="PROJECT", help="a folder with a specgate.yaml, or one YAML file")
    today.add(parser)
    parser.epilog = (
        "exit status: 0 it is shown, whether the gate passes or holds; 2 there is none, or the input is unusable"
    )


def run(options: argparse.Namespace) -> int:
    """Judge the project and print one requirement of it."""
    from specgate.cli.judge import judge
    from specgate.report import terminal, tracing
    from specgate.review.types import Unusable
    from specgate.terms.names import nearest

    judged = judge(options.project, drawn=False, today=options.date)
    review = judged.review
    if isinstance(review, Unusable):
        text = terminal.render(review, width=width(sys.stderr), colour=colour("auto", sys.stderr))
        print(text, end="", file=sys.stderr)
        return judged.status
    if options.id not in review.requirements:
        close = nearest(options.id, review.requirements)
        hint = f"; did you mean {close}?" if close else ""
        print(f"specgate: {options.id} is no requirement of {review.project.id}{hint}", file=sys.stderr)
        return status.UNUSABLE
    print(tracing.render(review, options.id, width=width(sys.stdout)), end="")
    return status.PASSES
