"""`specgate report`: the compliance report, written whether the gate passes or holds."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.cli import status, today
from specgate.cli.baselines import add_options, chosen
from specgate.cli.terminal import colour, progress, width

if TYPE_CHECKING:
    from specgate.review.types import Review


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `report`."""
    parser.add_argument("project", metavar="PROJECT", help="a folder with a specgate.yaml, or one YAML file")
    parser.add_argument(
        "-o", "--output", metavar="FILE", required=True, help="the report: FILE.pdf to sign, FILE.html to read"
    )
    today.add(parser)
    add_options(parser)
    parser.epilog = status.EXPLAINED


def _attachments(project: str, review: Review) -> dict[str, bytes]:
    """Return the files that the verdicts rest on, by name, and the result itself."""
    from specgate.exchange import json

    path = Path(project)
    root = path if path.is_dir() else path.parent
    files = {item.path: (root / item.path).read_bytes() for item in review.inputs}
    return files | {"results.json": json.write(review).encode()}


def run(options: argparse.Namespace) -> int:
    """Judge the project, write the report, say where it is, and return the exit status of the gate."""
    suffix = Path(options.output).suffix.lower()
    if suffix not in (".pdf", ".html"):
        print(f"specgate: a report is FILE.pdf or FILE.html, not {options.output}", file=sys.stderr)
        return status.UNUSABLE
    from specgate.cli.files import write
    from specgate.cli.judge import judge
    from specgate.report import terminal
    from specgate.review.types import Unusable

    judged = judge(options.project, formulas=True, today=options.date, since=chosen(options))
    if isinstance(judged.review, Unusable):
        text = terminal.render(judged.review, width=width(sys.stderr), colour=colour("auto", sys.stderr))
        print(text, end="", file=sys.stderr)
        print(f"specgate: no report was written to {options.output}", file=sys.stderr)
        return judged.status
    with progress("laying out the report"):
        if suffix == ".html":
            from specgate.report import html

            content = html.render(judged.review).encode()
        else:
            from specgate.report import pdf

            content = pdf.render(judged.review, _attachments(options.project, judged.review))
    write(options.output, content)
    print(f"{options.output}: the gate {'passes' if judged.status == status.PASSES else 'holds'}")
    return judged.status
