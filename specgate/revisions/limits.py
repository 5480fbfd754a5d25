"""Whether a limit was tightened or loosened: as sets of allowed values, compared exactly.

Every limit but a yes or no allows an interval: `at_most` one without a low end, `at_least` one without a high end,
`between` and `within … of` one with both, `equals` of a whole number a single point. Tightened: the new interval lies
in the old one; loosened: the other way round; shifted: tighter at one end and looser at the other.
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from specgate.review.types import Amount, LimitReview
from specgate.revisions.amounts import number, order

SAME, TIGHTENED, LOOSENED, SHIFTED, CHANGED = "same", "tightened", "loosened", "shifted", "changed"
Interval = tuple[Amount | None, Amount | None]


def compared(old: LimitReview, new: LimitReview) -> str:
    """Return how a limit was moved; `changed` where the two have no common measure."""
    if isinstance(old.equals, bool) or isinstance(new.equals, bool):
        return SAME if old.equals is new.equals else CHANGED
    before, after = interval(old), interval(new)
    if before is None or after is None:
        return SAME if old == new else CHANGED
    low, high = _raised(before[0], after[0], -1), _raised(before[1], after[1], 1)
    if low is None or high is None:
        return CHANGED
    high = -high
    if low == high == 0:
        return SAME
    if min(low, high) >= 0:
        return TIGHTENED
    return LOOSENED if max(low, high) <= 0 else SHIFTED


def _raised(before: Amount | None, after: Amount | None, missing: int) -> int | None:
    """Return 1 where an end was raised, -1 where it was lowered; one that is missing lies at `missing` infinity."""
    if before is None or after is None:
        return missing * (int(after is None) - int(before is None))
    return order(after, before)


def interval(limit: LimitReview) -> Interval | None:
    """Return the ends of what a limit allows, None for an end that it leaves free; None for a yes or no."""
    if limit.between is not None:
        return limit.between
    if limit.within is not None and limit.of is not None:
        return _around(limit.of, limit.within)
    if limit.equals is not None:
        if isinstance(limit.equals, bool):
            return None
        point = Amount(float(limit.equals), "1", str(limit.equals))
        return point, point
    if limit.at_most is None and limit.at_least is None:
        return None
    return limit.at_least, limit.at_most


def _around(middle: Amount, half: Amount) -> Interval | None:
    centre, distance = number(middle), number(half)
    if centre is None or distance is None or middle.unit != half.unit:
        return None
    low, high = (Fraction(str(end)) for end in (centre - distance, centre + distance))
    return tuple(replace(middle, value=float(end), exact=str(end), as_written=None) for end in (low, high))  # type: ignore[return-value]
