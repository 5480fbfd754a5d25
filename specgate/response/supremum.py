"""The supremum of a response over all time after the step, and the first time at which it is taken."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import compress
from math import inf

import numpy as np
from flint import arb, fmpq

from specgate.response.accounts import Account
from specgate.response.answers import Answer
from specgate.response.budget import Budget, Exhausted, OutOfWork
from specgate.response.certify import Zero
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.extremes import EQUAL_BITS, Extreme, joined
from specgate.response.grid import Grid
from specgate.response.modes import GUARD
from specgate.response.peak import Climb, Last
from specgate.response.record import modal_account
from specgate.response.segments import exact, float_of
from specgate.response.tail import tail
from specgate.terms.precision import working_precision
from specgate.terms.records import record

APPROACHED = "the value is approached and never taken"

SLACK = 2.0**-46
"""Parts of the change within which a supremum is known where its summit is not."""


@record
class Floor:
    """What is reached or approached whatever the summits are.

    level: ball of sign * g there, by bits. low: a float not above it. extreme: the answer if no summit is higher.
    """

    level: Callable[[int], arb]
    low: float
    extreme: Extreme


def highest(course: Course, sign: int) -> Extreme:
    """Return the supremum over t > 0 of sign * y of a settling response, as a value of y, and its first time.

    Candidates are y(0+), which counts as taken at time 0, the final value, which is approached, and every summit of
    sign * (y - final) above both up to the time from which on it is proved to stay below the best one: there the
    envelope is below it, or, as long as nothing above the final value was found, the deviation has the other sign for
    good.
    """
    jump = sign * course.deviation.initial
    floor = exact_floor(course, sign, max(jump, fmpq(0)), taken=jump >= 0)

    def last(best: float, firm: Callable[[int], arb]) -> fmpq | None:
        return tail(course.deviation, best, firm) if best > 0.0 else course.below_from(sign)

    try:
        return _highest_above(course, sign, floor, last)
    except Exhausted as limit:
        return Extreme.undecided(limit.reason)
    except OutOfWork as limit:
        return _nearly(course, sign, floor, Extreme.undecided(limit.reason))


def _nearly(course: Course, sign: int, floor: Floor, undecided: Extreme) -> Extreme:
    """Return the supremum within 3 SLACK of the change, without its time, where the exact search did not end.

    The end of the interval is a multiple of SLACK, so that it does not depend on the last bits of floats.
    """
    slack = SLACK * course.deviation.change

    def last(best: float, _: Callable[[int], arb]) -> fmpq | None:
        level = max(best, 0.0) + slack
        return tail(course.deviation, level, lambda _: arb(level))

    def on(grid: Grid, budget: Budget) -> float:
        climb = Climb(course.deviation, sign, floor, budget, slack)
        climb.over(grid, last)
        if climb.summits:
            raise OutOfWork("peaks of the response are not told apart")
        return climb.best

    step = exact(slack)
    try:
        best = (exact(course.search(on)) / step).floor() * step
    except OutOfWork:
        return undecided

    def value(bits: int) -> arb:
        with working_precision(bits):
            height = arb(sign * best).union(arb(sign * (best + 3 * step)))
        return course.deviation.response(height)

    return Extreme(Answer.of_ball(value), undecided.time)


def above(course: Course, sign: int, floor: Floor, last: Last) -> Extreme:
    """Return the highest summit of sign * g that is above the floor, or else the floor."""
    try:
        return _highest_above(course, sign, floor, last)
    except OutOfWork as limit:
        return Extreme.undecided(limit.reason)


def _highest_above(course: Course, sign: int, floor: Floor, last: Last) -> Extreme:
    summits, clear = course.search(lambda grid, budget: _summits(course, sign, floor, last, grid, budget))
    if not summits:
        return floor.extreme
    equal = [_at(course, summit, lambda: _how(course, sign, summits, last)) for summit in summits]
    return joined(equal if clear else [*equal, floor.extreme])


def exact_floor(course: Course, sign: int, level: fmpq, *, taken: bool) -> Floor:
    """Return the floor at a rational value of sign * g: the jump (taken, at time 0) or one that is approached."""
    shared = course.deviation
    value = (shared.offset + sign * level) / shared.to_units(fmpq(1))
    time = Answer.of_exact(0) if taken else Answer.nothing(APPROACHED)
    return Floor(
        lambda bits: Answer.of_exact(level).enclose(bits),
        float(np.nextafter(float_of(level), -inf)),
        Extreme(Answer.of_exact(value), time),
    )


def _summits(
    course: Course, sign: int, floor: Floor, last: Last, grid: Grid, budget: Budget
) -> tuple[list[Zero], bool]:
    climb = Climb(course.deviation, sign, floor, budget)
    climb.over(grid, last)
    return _tallest([summit.zero for summit in climb.summits], sign, floor)


def _tallest(summits: Sequence[Zero], sign: int, floor: Floor) -> tuple[list[Zero], bool]:
    """Return the summits that are not proved lower than another one or the floor, and whether they are above it."""
    left, clear, bits = list(summits), True, 64
    while left and bits <= EQUAL_BITS:
        with working_precision(bits + 64):
            level = floor.level(bits + 64)
            heights = [sign * summit.value(bits) for summit in left]
            best = max(height.lower().mid().fmpq() for height in heights)
            kept = [not (height < arb(best) or height < level) for height in heights]
            clear = all(height > level for height in compress(heights, kept))
        left = list(compress(left, kept))
        if len(left) == 1 and clear:
            break
        bits *= 2
    return left, clear


def _how(course: Course, sign: int, summits: Sequence[Zero], last: Last) -> Account:
    """Say how a greatest value was found; it is looked for until a bound is below it."""
    firm = sign * summits[0].value(LOWEST)
    best = float_of(firm.lower().fmpq())
    method = "the highest turning point: where a bound of the cells is below it nothing was searched"
    return modal_account(course, method, brackets=len(summits), since=last(best, lambda bits: firm))


def _at(course: Course, summit: Zero, how: Callable[[], Account]) -> Extreme:
    deviation = course.deviation

    def time(bits: int) -> arb:
        return deviation.to_time(summit.enclose(bits), bits + GUARD)

    value = Answer.of_ball(lambda bits: deviation.response(summit.value(bits)))
    return Extreme(value.accounted(how), Answer.of_ball(time).accounted(how))
