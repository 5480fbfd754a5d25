"""Greatest and least value of a settling response, with the time at which it is taken."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import reduce
from itertools import compress
from math import inf

import numpy as np
from flint import arb, fmpq

from specgate.response.answers import Answer, Fragile
from specgate.response.budget import Budget, OutOfWork
from specgate.response.certify import Zero, float_of
from specgate.response.course import Course
from specgate.response.grid import Grid
from specgate.response.modes import GUARD
from specgate.response.peak import Climb
from specgate.response.tail import tail
from specgate.terms.precision import working_precision

_APPROACHED = "the value is approached and never taken"
_EQUAL_BITS = 1024
"""Precision beyond which two heights that still overlap are left standing side by side."""


@dataclass(frozen=True)
class Extreme:
    """An extreme value and when it is taken; the time is absent where the value is only approached."""

    value: Answer
    time: Answer


def highest(course: Course, sign: int) -> Extreme:
    """Return the supremum over t > 0 of sign * y, as a value of y, and its first time.

    Candidates are y(0+), which counts as taken at time 0, the final value, which is approached, and every summit of
    sign * (y - final) above both up to the time from which on it is proved to stay below the best one: there the
    envelope is below it, or, as long as nothing above the final value was found, the deviation has the other sign for
    good.
    """
    deviation = course.deviation
    jump = sign * deviation.initial
    floor = max(jump, fmpq(0))
    try:
        summits, clear = course.search(lambda grid, budget: _summits(course, sign, floor, grid, budget))
    except OutOfWork as limit:
        return Extreme(Answer.undecided(limit.reason), Answer.undecided(limit.reason))
    at_floor = _at_floor(course, sign * floor, taken=jump > 0)
    if not summits:
        return at_floor
    equal = [_at_summit(course, summit) for summit in summits]
    return _joined(equal if clear else [*equal, at_floor])


def greater(first: Extreme, second: Extreme) -> Extreme:
    """Return the one of two extremes whose value is greater, or both in one where that is not told."""
    for extreme in (first, second):
        if extreme.value.absent is not None:
            return extreme
    if first.value.exact is not None and second.value.exact is not None:
        if first.value.exact == second.value.exact:
            return first if first.time.absent is not None else second
        return first if first.value.exact > second.value.exact else second
    bits = 64
    while bits <= _EQUAL_BITS:
        one, other = first.value.enclose(bits), second.value.enclose(bits)
        if one > other:
            return first
        if one < other:
            return second
        bits *= 2
    return _joined([first, second])


def mirrored(extreme: Extreme) -> Extreme:
    """Return the extreme of -y."""
    value = extreme.value
    if value.exact is not None:
        return Extreme(replace(value, exact=-value.exact), extreme.time)
    if value.refine is not None:
        return Extreme(Answer.of_ball(lambda bits: -value.enclose(bits), value.fragile), extreme.time)
    return extreme


def _summits(course: Course, sign: int, floor: fmpq, grid: Grid, budget: Budget) -> tuple[list[Zero], bool]:
    """Return the highest summits, and whether they are proved to be above the floor."""
    climb = Climb(course.deviation, sign, float(np.nextafter(float_of(floor), -inf)), budget)
    climb.over(grid.upward(budget), lambda best: _end(course, sign, best))
    return _tallest([summit.zero for summit in climb.summits], sign, floor)


def _end(course: Course, sign: int, best: float) -> float | None:
    if best > 0.0:
        return tail(course.deviation.table, best)
    lasting = course.lasting
    return lasting.since if lasting is not None and lasting.sign != sign else None


def _tallest(summits: Sequence[Zero], sign: int, floor: fmpq) -> tuple[list[Zero], bool]:
    """Return the summits that are not proved lower than another one or the floor, and whether they are above it."""
    left, bits = list(summits), 64
    while left and bits <= _EQUAL_BITS:
        with working_precision(bits + 64):
            level = arb(floor)
            heights = [sign * summit.value(bits) for summit in left]
            best = max(height.lower().mid().fmpq() for height in heights)
            kept = [not (height < arb(best) or height < level) for height in heights]
            clear = all(height > level for height, keep in zip(heights, kept, strict=True) if keep)
        left = list(compress(left, kept))
        if len(left) == 1 and clear:
            return left, True
        bits *= 2
    return left, not left or clear


def _at_floor(course: Course, deviation: fmpq, *, taken: bool) -> Extreme:
    """Return the extreme at the jump (taken, at time 0) or at the final value (approached)."""
    value = (course.deviation.offset + deviation) / course.deviation.to_units(fmpq(1))
    return Extreme(Answer.of_exact(value), Answer.of_exact(0) if taken else Answer.nothing(_APPROACHED))


def _at_summit(course: Course, summit: Zero) -> Extreme:
    def time(bits: int) -> arb:
        return course.deviation.to_time(summit.enclose(bits), bits + GUARD)

    return Extreme(Answer.of_ball(lambda bits: course.deviation.response(summit.value(bits))), Answer.of_ball(time))


def _joined(extremes: Sequence[Extreme]) -> Extreme:
    """Return one extreme that holds all of several that are not told apart."""
    if len(extremes) == 1:
        return extremes[0]
    fragile = Fragile("peaks of the response are too close in height to be told apart")
    values = [extreme.value for extreme in extremes]
    times = [extreme.time for extreme in extremes if extreme.time.absent is None]
    return Extreme(
        Answer.of_ball(lambda bits: _union(values, bits), fragile),
        Answer.of_ball(lambda bits: _union(times, bits), fragile),
    )


def _union(answers: Sequence[Answer], bits: int) -> arb:
    balls = [answer.enclose(bits) for answer in answers]
    with working_precision(bits + GUARD):
        return reduce(lambda one, other: one.union(other), balls)
