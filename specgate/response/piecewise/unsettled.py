"""Extremes of a piecewise response that does not settle: what runs away, and what swings for ever about a constant."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.extremes import EQUAL_BITS, Extreme
from specgate.response.modes import dyadic
from specgate.response.piecewise.climbing import Ceiling, tallest, value_at
from specgate.response.piecewise.heights import as_extreme, first_of
from specgate.response.piecewise.patches import LOOK, Ground
from specgate.terms.precision import working_precision

_ROUNDS = 12
_STAGES = (-4, -16, -30, -44)
_OPEN = "the greatest value of a response that does not settle is not told here"


def unsettled_extreme(ground: Ground, sign: int) -> Extreme:
    """Return sup sign * y over t > 0, as a value of y, and where it is taken."""
    way = ground.pieces.runaway()
    if way is not None and way in (0, sign):
        return Extreme.nothing("the response grows without bound")
    reach = ground.pieces.reach(sign)
    if way is None and reach is None:
        return Extreme.undecided(_OPEN)
    try:
        with working_precision(ground.bits + LOOK):
            return _searched(ground, sign)
    except OutOfWork as limit:
        return Extreme.undecided(limit.reason)


def _searched(ground: Ground, sign: int) -> Extreme:
    """Search up to where nothing is above the best value any more.

    Where y swings for ever about a constant it comes as near as one likes to the reach of the swing, again and again.
    """
    reach = ground.pieces.reach(sign)
    start = sign * value_at(ground.pieces, 0, 0, fmpq(0), LOOK)
    with working_precision(LOOK):
        floor = (start if reach is None else reach(LOOK)).lower()
        size = max(abs(start).upper(), abs(floor)) if reach is not None else abs(start).upper()
    slack = _size(size) * dyadic(_STAGES[-1])
    ceiling = Ceiling(ground, 0, sign, floor, slack)
    ceiling.at(fmpq(0))
    done, clear = fmpq(0), False
    for turn in range(_ROUNDS):
        stage = _size(size) * dyadic(_STAGES[min(turn, len(_STAGES) - 1)])
        lead = (ceiling.best - floor).lower().fmpq()
        clear = reach is None or lead > slack
        level = ceiling.best.fmpq() if clear else floor.fmpq() + 2 * stage
        until = ground.pieces.beyond(sign, level)
        if until is None:
            raise OutOfWork(_OPEN)
        if until <= done and (clear or turn >= len(_STAGES)):
            break
        if until > done:
            ceiling.over(done, until)
            done = until
    else:
        raise OutOfWork(_OPEN)
    peaks = tallest(ceiling.found, floor, ceiling.best, EQUAL_BITS)
    if ceiling.blurred or not clear or not peaks:
        return _about(ceiling, sign, slack)
    return first_of([as_extreme(peak) for peak in peaks])


def _about(ceiling: Ceiling, sign: int, slack: fmpq) -> Extreme:
    """Return the best value and a little more, where a summit is not told from the reach of a swing.

    Whether that is taken or only approached is not told either: without a transient it is taken in every period.
    """
    with working_precision(LOOK):
        value = sign * ceiling.best.union(ceiling.best + arb(8 * slack))
    return Extreme(Answer.of_ball(lambda _: value), Answer.undecided("when it is taken, if it is, is not told"))


def _size(value: arb) -> fmpq:
    """Return about the size of a number, 1 for zero."""
    size: fmpq = value.upper().fmpq()
    return size if size > 0 else fmpq(1)
