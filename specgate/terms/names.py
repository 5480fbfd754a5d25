"""The nearest known name to one that is unknown."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

_LONGEST = 80


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the known name that `word` was most likely meant to be, or None; letter case counts least."""
    candidates = list(dict.fromkeys(known))
    if len(word) > _LONGEST:
        return None
    folded = [name for name in candidates if name.casefold() == word.casefold()]
    if folded:
        return folded[0]
    close = get_close_matches(word, candidates, n=1, cutoff=0.6)
    return close[0] if close else None
