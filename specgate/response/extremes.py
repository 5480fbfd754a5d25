"""Extremes of a response as answers: a value and the time at which it is taken."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from functools import reduce

from flint import arb

from specgate.response.answers import Answer, Fragile
from specgate.response.modes import GUARD
from specgate.terms.precision import working_precision
from specgate.terms.records import record

EQUAL_BITS = 1024
"""Precision beyond which two heights that still overlap are left standing side by side."""


@record
class Extreme:
    """An extreme value and when it is taken; the time is absent where the value is only approached."""

    value: Answer
    time: Answer

    @staticmethod
    def undecided(reason: str) -> Extreme:
        """Return an extreme left open."""
        return Extreme(Answer.undecided(reason), Answer.undecided(reason))

    @staticmethod
    def nothing(reason: str) -> Extreme:
        """Return the proof that there is no finite extreme."""
        return Extreme(Answer.nothing(reason), Answer.nothing(reason))


def mirrored(extreme: Extreme) -> Extreme:
    """Return the extreme of -y."""
    value = extreme.value
    if value.exact is not None:
        return Extreme(replace(value, exact=-value.exact), extreme.time)
    if value.refine is not None:
        turned = Answer.of_ball(lambda bits: _negative(value.enclose(bits), bits), value.fragile)
        return Extreme(replace(turned, how=value.how), extreme.time)
    return extreme


def _negative(ball: arb, bits: int) -> arb:
    """Return -ball; a change of sign rounds to the precision that is set."""
    with working_precision(2 * bits + GUARD):
        return -ball


def greater(first: Extreme, second: Extreme) -> Extreme:
    """Return the one of two extremes whose value is greater, or both in one where that is not told."""
    for extreme in (first, second):
        if extreme.value.absent is not None and extreme.value.absent.proved:
            return extreme
    for extreme in (first, second):
        if extreme.value.absent is not None:
            return extreme
    if first.value.exact is not None and second.value.exact is not None:
        if first.value.exact == second.value.exact:
            return first if first.time.absent is not None else second
        return first if first.value.exact > second.value.exact else second
    bits = 64
    while bits <= EQUAL_BITS:
        one, other = first.value.enclose(bits), second.value.enclose(bits)
        if one > other:
            return first
        if one < other:
            return second
        bits *= 2
    return joined([first, second])


def joined(extremes: Sequence[Extreme]) -> Extreme:
    """Return one extreme that holds all of several that are not told apart."""
    if len(extremes) == 1:
        return extremes[0]
    fragile = Fragile("peaks of the response are too close in height to be told apart")
    values = [extreme.value for extreme in extremes]
    times = [extreme.time for extreme in extremes if extreme.time.absent is None]
    return Extreme(
        replace(Answer.of_ball(lambda bits: _union(values, bits), fragile), how=values[0].how),
        Answer.of_ball(lambda bits: _union(times, bits), fragile) if times else extremes[0].time,
    )


def _union(answers: Sequence[Answer], bits: int) -> arb:
    balls = [answer.enclose(bits) for answer in answers]
    with working_precision(bits + GUARD):
        return reduce(lambda one, other: one.union(other), balls)
