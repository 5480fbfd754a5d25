"""Settling and first arrival of a piecewise response, and whether a very small change would move them far."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import reduce
from itertools import accumulate

from flint import arb, fmpq

from specgate.response.answers import Answer, Fragile
from specgate.response.budget import OutOfWork
from specgate.response.fragility import NEAR
from specgate.response.modes import GUARD, dyadic
from specgate.response.piecewise.climbing import value_at
from specgate.response.piecewise.heights import SLACK
from specgate.response.piecewise.passing import Instant, Walk, Where
from specgate.response.piecewise.patches import LOOK, Ground, Line
from specgate.terms.precision import working_precision

_FAR = fmpq(1, 100)
_PROBES = 32
_DIP = 1 - fmpq(1, 10**6)
_FALL = 1e-6
_CALM = fmpq(1, 10**4)

Passage = tuple[Where | None, list[Where]]
"""The crossing, and the instants that are not told from the limit on the way to it."""


def settling(ground: Ground, final: fmpq, distance: fmpq) -> Answer:
    """Return the least T with |y - final| <= distance for all t >= T (s), distance > 0."""

    def search(factor: fmpq) -> Passage:
        until = ground.pieces.settled_by(distance * factor)
        if until is None:
            raise OutOfWork("the band is too narrow beside the response to be followed")
        found: Where | None = None
        touching: list[Where] = []
        for side in (1, -1):
            walk = Walk(ground, Line(final + side * distance * factor), side, backward=True)
            crossing = walk.between(fmpq(0) if found is None else _start(found), until)
            found = crossing if crossing is not None else found
            touching += walk.touching
        return found, [place for place in touching if found is None or not _before(place, found)]

    def away(time: fmpq) -> arb:
        value = _value(ground, time)
        with working_precision(LOOK):
            return abs(value - final) / distance

    return _answered(search, away, Answer.of_exact(0), backward=True)


def first_arrival(ground: Ground, final: fmpq, level: fmpq, size: fmpq) -> Answer:
    """Return the first t > 0 with y(t) >= level, or <= level where the level is negative (s); 0 if y(0+) is there."""
    side = -1 if level < 0 else 1
    jump = ground.pieces.jump(0)
    if jump is not None and (jump - level) * side >= 0:
        return Answer.of_exact(0)

    def search(factor: fmpq) -> Passage:
        height = level * factor
        walk = Walk(ground, Line(height), side, backward=False, closed=True)
        until, told = _last_chance(ground, final, height, side, size)
        found = walk.between(fmpq(0), until)
        if found is None and until is not None and not walk.touching and _rests(ground, final, height):
            found = Instant(ground.index(until), until)
        if found is None and not told:
            raise OutOfWork("whether the response reaches the level or only comes ever closer to it is not told")
        return found, walk.touching

    def away(time: fmpq) -> arb:
        value = _value(ground, time)
        with working_precision(LOOK):
            return value / level

    never = Answer.nothing("the response never reaches the level")

    def rest() -> fmpq | None:
        return None if level == 0 else ground.pieces.settled_by(abs(level) * _CALM)

    return _answered(search, away, never, backward=False, returns=(final - level) * side < 0, rest=rest)


def _rests(ground: Ground, final: fmpq, level: fmpq) -> bool:
    """Whether y is exactly at a level from its last chance to reach it on."""
    lasting = ground.pieces.lasting()
    return level == final and lasting is not None and lasting[0] == 0


def _last_chance(ground: Ground, final: fmpq, level: fmpq, side: int, size: fmpq) -> tuple[fmpq | None, bool]:
    """Return a time from which on the level is not crossed any more (None: it will be), and whether that is proved."""
    gap = (level - final) * side
    if gap < 0:
        return None, True
    if gap > 0:
        until = ground.pieces.settled_by(gap)
        if until is None:
            raise OutOfWork("from when on the response stays near its final value is not told closely enough")
        return until, True
    lasting = ground.pieces.lasting()
    if lasting is not None:
        return (None, True) if lasting[0] * side > 0 else (lasting[1], True)
    return ground.pieces.settled_by(size * dyadic(SLACK)), False


def _answered(
    search: Callable[[fmpq], Passage],
    away: Callable[[fmpq], arb],
    without: Answer,
    *,
    backward: bool,
    returns: bool = True,
    rest: Callable[[], fmpq | None] = lambda: None,
) -> Answer:
    """Return what a search found; rest: from when on the response all but rests, for an arrival that there is not."""
    try:
        crossing, touching = search(fmpq(1))
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)
    try:
        fragile = None if touching else _fragility(search, away, crossing, rest, backward=backward, returns=returns)
    except OutOfWork:
        fragile = None
    if touching and crossing is None and not backward:
        return Answer.undecided("whether the response reaches the level or stays just off it is not told")
    if touching:
        fragile = Fragile("whether the response crosses the edge or only touches it is not told")
    places = touching if crossing is None else [crossing, *touching]
    if not places:
        return Answer(without.proof, exact=without.exact, absent=without.absent, fragile=fragile)
    if isinstance(crossing, Instant) and not touching:
        return Answer(without.proof, exact=crossing.time, fragile=fragile)
    return Answer.of_ball(lambda bits: _span(places, crossing is None, bits), fragile)


def _span(places: Sequence[Where], from_start: bool, bits: int) -> arb:
    """Return a ball over all instants that are not told apart (the start too, if nothing else was crossed)."""
    balls = [place.enclose(bits) for place in places]
    with working_precision(bits + GUARD):
        return reduce(lambda one, other: one.union(other), [*balls, *([arb(0)] if from_start else [])])


def _fragility(
    search: Callable[[fmpq], Passage],
    away: Callable[[fmpq], arb],
    crossing: Where | None,
    rest: Callable[[], fmpq | None],
    *,
    backward: bool,
    returns: bool,
) -> Fragile | None:
    """Return why a crossing is fragile and where else it might be: that of a limit 1 % to either side lies far away.

    Between the two crossings the response is inside of both limits again: it turns close to the limit. An arrival at a
    lower level is told where the response turns back after it; without an arrival at the level itself it has until it
    rests to do so, and one that only comes ever closer does not turn.
    """
    here = _middle(crossing)
    for factor, reason in (
        (1 - NEAR, "turns within 1 % of the edge without crossing it"),
        (1 + NEAR, "crosses the edge by less than 1 % before it turns back"),
    ):
        other, _ = search(factor)
        there = _middle(other)
        if other is None and (crossing is None or factor < 1 or not returns):
            continue
        if abs(here - there) <= _FAR * max(abs(here), abs(there)):
            continue
        if factor < 1 and not backward:
            end = here if crossing is not None else rest()
            if other is not None and end is not None and _turns_back(away, there, end):
                return Fragile(f"the response {reason}", other.enclose)
            continue
        if other is None and not backward:
            return Fragile(f"the response {reason}, and nowhere else")
        if _dips(away, min(here, there), max(here, there), min(factor, fmpq(1)) * _DIP):
            refine = other.enclose if other is not None else (lambda _: arb(0))
            return Fragile(f"the response {reason}", refine)
    return None


def _dips(away: Callable[[fmpq], arb], one: fmpq, other: fmpq, level: fmpq) -> bool:
    """Whether the response is inside of a limit somewhere between two instants, at one of a few probes: no proof."""
    probes = (away(one + (other - one) * k / _PROBES) for k in range(1, _PROBES))
    return any(bool(probe < level) for probe in probes)


def _turns_back(away: Callable[[fmpq], arb], one: fmpq, other: fmpq) -> bool:
    """Whether the response falls again somewhere between two instants, by a few probes: no proof."""
    values = [float(away(one + (other - one) * k / _PROBES).mid()) for k in range(_PROBES)]
    return any(later < highest - _FALL for highest, later in zip(accumulate(values, max), values, strict=True))


def _value(ground: Ground, time: fmpq) -> arb:
    return value_at(ground.pieces, ground.index(time), 0, time, 32)


def _middle(place: Where | None) -> fmpq:
    return fmpq(0) if place is None else place.enclose(64).mid().fmpq()


def _start(place: Where) -> fmpq:
    return max(fmpq(0), place.enclose(64).lower().fmpq())


def _before(place: Where, other: Where) -> bool:
    return bool(place.enclose(64) < other.enclose(64))
