"""A reworded text, word by word: what stayed, what went, what came."""

from __future__ import annotations

from collections.abc import Iterator
from difflib import SequenceMatcher

from specgate.terms.records import record

MOST_WORDS = 2000
"""Longer texts are shown whole, one after the other: matching them takes time that grows with their square."""


@record
class Piece:
    """Some words that are `same`, `old` or `new`."""

    kind: str
    text: str


def marked(old: str, new: str) -> tuple[Piece, ...]:
    """Return two texts as one, with the words that differ marked."""
    before, after = old.split(), new.split()
    if max(len(before), len(after)) > MOST_WORDS:
        return Piece("old", old), Piece("new", new)
    return tuple(_pieces(before, after))


def _pieces(before: list[str], after: list[str]) -> Iterator[Piece]:
    for kind, start, end, first, last in SequenceMatcher(None, before, after, autojunk=False).get_opcodes():
        if kind == "equal":
            yield Piece("same", " ".join(before[start:end]))
            continue
        if end > start:
            yield Piece("old", " ".join(before[start:end]))
        if last > first:
            yield Piece("new", " ".join(after[first:last]))
