"""Whether a piecewise response stays inside a mask over time, and where it first leaves it.

Each limit is walked along from corner to corner. At a jump of the limit, and where it begins or ends, the looser one of
both holds at that instant; just beside it each holds on its own side, and y may jump too, so both are looked at.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.modes import dyadic
from specgate.response.piecewise.climbing import value_at
from specgate.response.piecewise.heights import SLACK
from specgate.response.piecewise.passing import Walk, Where
from specgate.response.piecewise.patches import Ground, Line
from specgate.response.piecewise.turning import Zero
from specgate.response.questions import Mask, Points
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

Stretch = tuple[fmpq, fmpq | None, Line]

_CLOSE = 256
_TOUCHES = "whether the response passes a limit of the mask or only touches it is not told"


def within(ground: Ground, mask: Mask, final: fmpq | None, size: fmpq) -> Answer:
    """Return whether y stays inside a mask; `at` has `time`, `value` and `limit` of the first violation."""
    try:
        upper = _first(ground, mask.upper, 1, mask.forever, final, size)
        lower = _first(ground, mask.lower, -1, mask.forever, final, size)
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)
    found = [one for one in (upper, lower) if one is not None]
    if not found:
        return Answer.of_truth(True)
    first = found[0] if len(found) == 1 or _earlier(found[0], found[1]) else found[1]
    where, line, touching = first
    if where is None:
        return Answer.undecided(_TOUCHES)
    before = any(not other.enclose(64) > where.enclose(64) for _, _, others in found for other in others)
    return Answer(Proof.ENCLOSED, truth=False, at=_violation(ground, where, line, unsure=bool(touching) or before))


Found = tuple[Where | None, Line, list[Where]]
"""The first violation, the limit there, and the instants before it that are not told from the limit."""


def _earlier(one: Found, other: Found) -> bool:
    if one[0] is None or other[0] is None:
        return one[0] is not None
    bits = 64
    while bits <= HIGHEST:
        first, second = one[0].enclose(bits), other[0].enclose(bits)
        if first < second:
            return True
        if second < first:
            return False
        bits *= 4
    return True


def _violation(ground: Ground, where: Where, line: Line, *, unsure: bool) -> dict[str, Answer | str]:
    """Return the time, the value and the limit of a violation; its time is open where an earlier touch may be one."""

    def limit(bits: int) -> arb:
        time = where.enclose(bits)
        with working_precision(bits + 32):
            return arb(line.value) + arb(line.slope) * time

    if isinstance(where, Zero):
        time, value = Answer.of_ball(where.enclose), Answer.of_ball(limit)
    else:
        index, instant = where.index, where.time
        time = Answer.of_exact(instant)
        value = Answer.of_ball(lambda bits: value_at(ground.pieces, index, 0, instant, bits))
    held = Answer.of_exact(line.value) if line.slope == 0 else Answer.of_ball(limit)
    return {"time": Answer.undecided(_TOUCHES) if unsure else time, "value": value, "limit": held}


def _first(ground: Ground, points: Points, side: int, forever: bool, final: fmpq | None, size: fmpq) -> Found | None:
    """Return the first instant beyond one limit."""
    touching: list[Where] = []
    line = Line(fmpq(0))
    for since, until, line in stretches(points, forever):
        walk = Walk(ground, line, side, backward=False, touching=touching)
        found = walk.between(since, until or _end(ground, line, side, final, size))
        if found is None and until is None and not _ends_well(ground, line, side, final):
            raise OutOfWork("whether the response passes a limit that it tends to is not told")
        if found is not None:
            return found, line, touching
    return (None, line, touching) if touching else None


def stretches(points: Points, forever: bool) -> Iterator[Stretch]:
    """Yield (since, until, limit) of the straight parts of a limit; the last has no end if it holds for ever."""
    for (time, value), (later, next_value) in pairwise(points):
        if later > time:
            slope = (next_value - value) / (later - time)
            yield time, later, Line(value - slope * time, slope)
    if points and forever:
        yield points[-1][0], None, Line(points[-1][1])


def _end(ground: Ground, line: Line, side: int, final: fmpq | None, size: fmpq) -> fmpq | None:
    """Return a time from which on a limit for ever is not passed; None: it will be, or that is not told."""
    if final is None:
        return _unsettled_end(ground, side, side * line.value)
    gap = (line.value - final) * side
    if gap > 0:
        until = ground.pieces.settled_by(gap)
        if until is None:
            raise OutOfWork("from when on the response stays near its final value is not told closely enough")
        return until
    if gap < 0:
        return None
    lasting = ground.pieces.lasting()
    if lasting is not None:
        return None if lasting[0] * side > 0 else lasting[1]
    return ground.pieces.settled_by(size * dyadic(SLACK))


def _unsettled_end(ground: Ground, side: int, level: fmpq) -> fmpq | None:
    """Return the same for a response that does not settle. Raises OutOfWork where it is not told."""
    until = ground.pieces.beyond(side, level)
    if until is not None or ground.pieces.runaway() in (side, 0):
        return until
    reach = ground.pieces.reach(side)
    if reach is not None and reach(_CLOSE) > level:
        return None
    raise OutOfWork("whether the response passes a limit that it comes back to for ever is not told")


def _ends_well(ground: Ground, line: Line, side: int, final: fmpq | None) -> bool:
    if final is None:
        return ground.pieces.beyond(side, side * line.value) is not None
    return (line.value - final) * side > 0 or ground.pieces.lasting() is not None
