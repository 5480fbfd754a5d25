"""Settling into a band for good, and first arrival at a level, of a settling response."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache, reduce

from flint import arb, fmpq

from specgate.response.accounts import Account
from specgate.response.answers import Answer, Fragile
from specgate.response.budget import Budget, OutOfWork
from specgate.response.certify import Bracket, Zero
from specgate.response.course import Course
from specgate.response.fragility import Target, fragility
from specgate.response.grid import Grid
from specgate.response.modes import GUARD
from specgate.response.record import modal_account
from specgate.response.segments import exact, float_of
from specgate.response.signs import sign_at
from specgate.response.tail import tail
from specgate.response.walk import Band, Passage, Walk
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

Search = Callable[[Course, Target, Band, Grid, Budget], Passage]


def settling(course: Course, distance: fmpq) -> Answer:
    """Return the least T with |y - final| <= distance for all t >= T (s), distance > 0.

    Beyond the tail the envelope is inside the band; from there a walk back finds the last crossing. The response is
    inside from that crossing on, and outside just before it.
    """
    edge = course.deviation.to_units(distance)
    return _answer(course, Target(fmpq(0), edge, None, backward=True), _settled, Answer.of_exact(0))


def first_arrival(course: Course, level: fmpq) -> Answer:
    """Return the first t > 0 with y(t) >= level, or <= level where the level is negative (s); 0 if y(0+) is there."""
    deviation = course.deviation
    side = -1 if level < 0 else 1
    height = deviation.to_units(level)
    if (deviation.initial + deviation.offset - height) * side >= 0:
        return Answer.of_exact(0)
    target = Target(-deviation.offset, abs(height), side, backward=False)
    return _answer(course, target, _arrived, Answer.nothing("the response never reaches the level"))


def _answer(course: Course, target: Target, search: Search, without: Answer) -> Answer:
    def on(grid: Grid, budget: Budget) -> tuple[Passage, Fragile | None]:
        def walk(band: Band) -> Passage:
            return search(course, target, band, grid, budget)

        passage = walk(target.band(fmpq(1)))
        return passage, fragility(course, target, passage, walk, grid, budget)

    try:
        passage, fragile = course.search(on)
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)
    if passage.touching and passage.crossing is None and not target.backward:
        return Answer.undecided("whether the response reaches the level or stays just off it is not told")
    if passage.touching:
        fragile = Fragile(
            "whether the response crosses the edge or only touches it is not told at the highest precision"
        )
    zeros = passage.touching if passage.crossing is None else (passage.crossing, *passage.touching)
    if not zeros:
        return (
            without
            if fragile is None
            else Answer(Proof.EXACT, without.truth, without.exact, None, without.absent, fragile)
        )
    # many limits may be put to one response: the ball of each precision is found once
    found = Answer.of_ball(cache(lambda bits: _span(course, zeros, passage.crossing is None, bits)), fragile)
    return found.accounted(lambda: _how(course, target, len(zeros)))


def _how(course: Course, target: Target, brackets: int) -> Account:
    """Say how a crossing was found."""
    band = target.band(fmpq(1))
    since = _tail(course, target.size) if target.backward else _last_chance(course, band)
    last = (
        "the last crossing of the band: beyond it the sum of all modes is a bound, and the search goes back from there"
    )
    first = "the first crossing of the level, from the start on"
    return modal_account(course, last if target.backward else first, brackets=brackets, since=since)


def _tail(course: Course, edge: fmpq) -> fmpq | None:
    return tail(course.deviation, float_of(edge), lambda bits: Answer.of_exact(edge).enclose(bits))


def _span(course: Course, zeros: tuple[Zero, ...], from_start: bool, bits: int) -> arb:
    """Return a ball over all instants that are not told apart (the step too, if nothing else was crossed)."""
    balls = [course.deviation.to_time(zero.enclose(bits), bits + GUARD) for zero in zeros]
    with working_precision(bits + GUARD):
        return reduce(lambda one, other: one.union(other), [*balls, *([arb(0)] if from_start else [])])


def _settled(course: Course, target: Target, band: Band, grid: Grid, budget: Budget) -> Passage:
    assert band.high is not None
    since = _tail(course, band.high)
    if since is None:
        raise OutOfWork("the band is too narrow beside the response to be followed")
    walk = Walk(course.deviation, band, budget, backward=True, end=since, margin=target.margin)
    crossing = walk.through(grid.downward(since, budget))
    return walk.passage(crossing or _in_start(course, band, backward=True))


def _arrived(course: Course, target: Target, band: Band, grid: Grid, budget: Budget) -> Passage:
    end = _last_chance(course, band)
    walk = Walk(course.deviation, band, budget, backward=False, end=end, margin=target.margin)
    crossing = _in_start(course, band, backward=False)
    return walk.passage(crossing or walk.through(grid.upward(budget)))


def _last_chance(course: Course, band: Band) -> fmpq | None:
    """Return a time from which on the one edge of a band is not crossed any more, None if that is not known.

    An edge on the far side of the final value is out of reach once the envelope is below its distance; the final value
    itself is out of reach while the deviation keeps the sign of the inside.
    """
    edge, side = (band.high, 1) if band.high is not None else (band.low, -1)
    assert edge is not None
    if edge * side > 0:
        return _tail(course, abs(edge))
    return course.below_from(side) if edge == 0 else None


def _in_start(course: Course, band: Band, *, backward: bool) -> Zero | None:
    """Return the crossing on the monotone start, if its far end is outside of the band."""
    length = exact(course.start.length)
    far = fmpq(0) if backward else length
    for edge, beyond in ((band.low, -1), (band.high, 1)):
        if edge is not None and sign_at(course.deviation, far, 0, edge) == beyond:
            rising = course.start.direction > 0
            return Zero(course.deviation, Bracket(0, edge, fmpq(0), length, rising, course.start_bend, length / 2))
    return None
