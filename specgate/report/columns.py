"""Text in columns on a terminal: widths counted in cells, words wrapped, colour laid on last."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator, Mapping, Sequence

from specgate.terms.records import record

GAP = "  "


def cells(text: str) -> int:
    """Return how many cells a text takes: wide characters two, combining ones none."""
    if text.isascii():
        return len(text)
    return sum(
        0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in ("W", "F") else 1 for c in text
    )


def filled(text: str, width: int, right: bool = False) -> str:
    """Return text padded to `width` cells, on the left where `right`."""
    space = " " * (width - cells(text))
    return space + text if right else text + space


def wrapped(text: str, width: int, first: str = "", hang: str = "") -> Iterator[str]:
    """Yield text as lines of at most `width` cells, broken at blanks; they begin with `first`, the others with `hang`.

    A word longer than a line stands alone and runs over: a path that is cut in two can no longer be opened.
    """
    line, lead = "", first
    for word in text.split():
        if line and cells(lead + line) + 1 + cells(word) > width:
            yield lead + line
            line, lead = word, hang
        else:
            line = f"{line} {word}" if line else word
    yield lead + line


def folded(text: str, width: int) -> list[str]:
    """Return text as lines of at most `width` cells, broken at blanks, and long names after `_` and `.`."""
    lines = [""]
    for word in text.split(" "):
        glue = " " if lines[-1] else ""
        if cells(lines[-1] + glue + word) <= width:
            lines[-1] += glue + word
            continue
        if lines[-1]:
            lines.append("")
        for part in _breakable(word, width):
            if cells(lines[-1] + part) > width and lines[-1]:
                lines.append("")
            lines[-1] += part
    return lines


def _breakable(word: str, width: int) -> Iterator[str]:
    """Give the parts of a word that may stand on lines of their own, none wider than `width` cells."""
    for part in re.split(r"(?<=[_.])", word):
        while cells(part) > width:
            size = next(n for n in range(len(part), 0, -1) if n == 1 or cells(part[:n]) <= width)
            yield part[:size]
            part = part[size:]
        yield part


@record
class Cell:
    """A cell of a table; `key` names its colour, empty for none."""

    text: str
    key: str = ""


@record
class Column:
    """A column: heading, whether it is flush right or holds numbers, the least width it may be folded to (None: never).

    Where even the least widths do not fit, columns are left out in the order of `expendable` (0: never).
    """

    heading: str
    right: bool = False
    number: bool = False
    least: int | None = None
    expendable: int = 0


def fitted(columns: Sequence[Column], rows: Sequence[Sequence[Cell]], width: int) -> dict[int, int]:
    """Return the width of each column that is shown, by its number, such that a row fits into `width` cells."""
    wanted = {k: max([cells(c.heading), *(cells(row[k].text) for row in rows)]) for k, c in enumerate(columns)}
    least = {k: min(w, columns[k].least or w) for k, w in wanted.items()}
    for k in sorted((k for k in wanted if columns[k].expendable), key=lambda k: columns[k].expendable):
        if _total(least) > width:
            del wanted[k], least[k]
    while _total(wanted) > width:
        spare = [(wanted[k] - least[k], k) for k in wanted if wanted[k] > least[k]]
        if not spare:
            break
        wanted[max(spare)[1]] -= 1
    return wanted


def _total(widths: Mapping[int, int]) -> int:
    return sum(widths.values()) + len(GAP) * (len(widths) - 1)
