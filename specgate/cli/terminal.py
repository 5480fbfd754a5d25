"""What depends on the terminal: colour, width, and a sign of life on long runs."""

from __future__ import annotations

import os
import shutil
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TextIO

PATIENCE = 1.0
"""Seconds of silence before progress is shown."""


def colour(choice: str, stream: TextIO) -> bool:
    """Decide on colour: `always` or `never` win; else only on a terminal, and not against NO_COLOR or TERM=dumb."""
    if choice != "auto":
        return choice == "always"
    return stream.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def width(stream: TextIO) -> int:
    """Columns to fill: the terminal's, or 120 where the output goes to a file or a pipe."""
    return max(60, shutil.get_terminal_size((120, 24)).columns) if stream.isatty() else 120


@contextmanager
def progress(doing: str) -> Iterator[None]:
    """Show `doing` and the seconds gone on standard error once PATIENCE is over, if that is a terminal."""
    if not sys.stderr.isatty():
        yield
        return
    done = threading.Event()
    thread = threading.Thread(target=_tick, args=(doing, done), daemon=True)
    thread.start()
    try:
        yield
    finally:
        done.set()
        thread.join()


def _tick(doing: str, done: threading.Event) -> None:
    seconds = PATIENCE
    shown = False
    while not done.wait(PATIENCE):
        print(f"\r{doing} … {seconds:.0f} s", end="", file=sys.stderr, flush=True)
        shown, seconds = True, seconds + PATIENCE
    if shown:
        print("\r\x1b[K", end="", file=sys.stderr, flush=True)
