"""Whether the lower limit of a mask lies above the upper one somewhere: then nothing keeps both.

Between two neighbouring corners of either side both limits are straight in the same coordinates (values over time or
frequency, or their logarithms over that of frequency), so that they cross there only if one lies above the other next
to one of the corners. It is therefore enough to compare them on both sides of each corner. At a jump the looser limit
holds, which is no tighter than what holds beside it. Straight values are exact; logarithms are balls, and only what
is proved counts.
"""

from __future__ import annotations

from itertools import pairwise

from flint import arb, fmpq

from specgate.response.questions import Mask, Points
from specgate.terms.precision import working_precision

_BITS = 192

Level = fmpq | arb


def crossed(mask: Mask) -> fmpq | None:
    """Return the first corner beside which the lower limit is proved to lie above the upper one, None without any."""
    with working_precision(_BITS):
        for place in sorted({at for at, _ in (*mask.upper, *mask.lower)}):
            sides = [_beside(points, place, mask) for points in (mask.upper, mask.lower)]
            (before_upper, after_upper), (before_lower, after_lower) = sides
            pairs = [(before_upper, before_lower), (after_upper, after_lower)]
            if not any(None not in pair for pair in pairs):  # one ends where the other begins
                pairs = [(before_upper, after_lower), (after_upper, before_lower)]
            if any(_above(lower, upper) for upper, lower in pairs):
                return place
    return None


def _above(lower: Level | None, upper: Level | None) -> bool:
    if lower is None or upper is None:
        return False
    if isinstance(lower, fmpq) and isinstance(upper, fmpq):
        return lower > upper
    return bool(arb(lower) > arb(upper))


def _beside(points: Points, place: fmpq, mask: Mask) -> tuple[Level | None, Level | None]:
    """Return a limit just before and just after a place, None where there is none."""
    line = _in_logarithms if mask.logarithmic else _straight
    before: Level | None = None
    after: Level | None = None
    for (first, level), (second, next_level) in pairwise(points):
        if first < place <= second:
            before = line(first, level, second, next_level, place)
        if first <= place < second:
            after = line(first, level, second, next_level, place)
    if points and mask.forever and place >= points[-1][0]:
        after = points[-1][1]
        before = after if place > points[-1][0] else before
    return before, after


def _straight(first: fmpq, level: fmpq, second: fmpq, next_level: fmpq, place: fmpq) -> Level:
    return level + (next_level - level) * (place - first) / (second - first)


def _in_logarithms(first: fmpq, level: fmpq, second: fmpq, next_level: fmpq, place: fmpq) -> Level:
    if level == next_level or place == first:
        return level
    if place == second:
        return next_level
    share = arb(place / first).log() / arb(second / first).log()
    return arb(level) * (arb(next_level / level).log() * share).exp()


__all__ = ["crossed"]
