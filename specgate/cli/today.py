"""`--date`: the day as which waivers are judged; the clock is never asked."""

from __future__ import annotations

import argparse
from datetime import date


def add(parser: argparse.ArgumentParser) -> None:
    """Add the option to a command that judges."""
    parser.add_argument(
        "--date",
        metavar="YYYY-MM-DD",
        type=_day,
        help="judge waivers as of this day (default: the date in the title block; never the clock)",
    )


def _day(text: str) -> str:
    """Return a day as it is written in the files. Raises ArgumentTypeError."""
    try:
        if len(text) == len("2026-11-02"):
            return date.fromisoformat(text).isoformat()
    except ValueError:
        pass
    raise argparse.ArgumentTypeError(f"{text!r} is no day such as 2026-11-02")
