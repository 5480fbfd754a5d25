"""What is computed in balls of one of a few precisions and kept: asking again for about as many bits costs nothing."""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeVar

T = TypeVar("T")

_LOWEST = 64


def rung(bits: int) -> int:
    """Return the next of 64, 96, 128, 192, 256 … bits from a precision on."""
    step = _LOWEST
    while step < bits:
        step *= 2
    return 3 * step // 4 if bits <= 3 * step // 4 and step > _LOWEST else step


def kept(make: Callable[[int], T]) -> Callable[[int], T]:
    """Return a function of a precision in bits that asks `make` at the next rung, once for each."""
    known: dict[int, T] = {}

    def asked(bits: int) -> T:
        at = rung(bits)
        if at not in known:
            known[at] = make(at)
        return known[at]

    return asked
