"""How a number was proved, in plain values: told where it is asked for, and computed only then.

Nothing stands here that two processors could find differently: counts of what is proved, radii rounded up to a power of
ten, times from which on something is proved rounded up to three digits.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from math import ceil

from flint import arb

from specgate.terms.enclosed import ends, rounded, to_float
from specgate.terms.records import record

_DIGITS = 3


@record
class Footing:
    """What a proof stands on: the kind of response or loop, and how its values are enclosed.

    ground: that, in words. poles: those that are certified, with multiplicity. pole_radius: none of them is further
    from the middle of its enclosure (1/s); a power of ten, 0 where all are exact. bits_of_modes: precision of what the
    search starts from.
    """

    ground: str
    poles: int | None = None
    pole_radius: float | None = None
    bits_of_modes: int | None = None


@record
class Account:
    """How one number, or one yes or no, was proved.

    method: what was searched and why nothing was missed, in words. brackets: intervals that hold what is searched, each
    with one proved change of sign. searched_until: a time (s) from which on a bound, and no search, excludes it.
    counts: what else was counted, each by its name. parts: the accounts of the numbers that this one is made of.
    """

    method: str
    footing: Footing | None = None
    brackets: int | None = None
    searched_until: float | None = None
    counts: Mapping[str, int | str] = field(default_factory=dict)
    parts: Mapping[str, Account] = field(default_factory=dict)


def radius_of(*balls: arb) -> float:
    """Return a power of ten that the radii of balls do not exceed, 0 for exact ones."""
    largest = max((ball.rad() for ball in balls), key=float)
    if largest == 0:
        return 0.0
    return float(f"1e{ceil((largest.log() / arb(10).log()).upper().fmpq())}")


def rounded_up(time: arb) -> float:
    """Return a time rounded up to three digits."""
    return to_float(rounded(ends(time)[1], "up", _DIGITS))
