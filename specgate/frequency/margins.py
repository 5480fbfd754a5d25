"""Stability margins from the crossings of an open loop, whatever kind of loop it is.

Premise, that the caller sees to: the closed loop is stable, and the crossings are all there are. Then the first factor
of the gain, the first lag, the first lead and the first dead time that bring L to -1 somewhere on the axis are the
first at which the closed loop is not stable any more: its roots move continuously and reach the boundary there first.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cmp_to_key

from flint import arb

from specgate.frequency.angles import the_way_round
from specgate.frequency.choose import Candidate, least, order_of
from specgate.frequency.questions import Crossing, Direction
from specgate.frequency.spots import Sign
from specgate.frequency.values import quotient, reciprocal
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

NOT_USED_UP = "nothing uses this margin up"


@record
class GainCrossing:
    """Where |L| = 1.

    frequency: rad/s; absent and infinite at infinite frequency. turn: the angle of -L in [0, pi] (rad). side: 1 where
    it is used up by lag, -1 by lead, 0 where either does (at 0 and pi).
    """

    frequency: Answer
    turn: Answer
    side: Sign


@record
class PhaseCrossing:
    """Where L is real and negative: `factor` > 0 brings it to -1; `rise` is the sign of factor - 1."""

    frequency: Answer
    factor: Answer
    rise: Sign


def described(gain: Sequence[GainCrossing], phase: Sequence[PhaseCrossing]) -> tuple[Crossing, ...]:
    """Return crossings as they are printed, each with what is left there, by frequency; infinite ones last."""
    of_gain = [Crossing("gain", one.frequency, one.turn, "lead" if one.side < 0 else "lag") for one in gain]
    of_phase = [Crossing("phase", one.frequency, _beyond_one(one), "down" if one.rise < 0 else "up") for one in phase]
    return tuple(sorted((*of_gain, *of_phase), key=cmp_to_key(_by_frequency)))


def _by_frequency(first: Crossing, second: Crossing) -> int:
    return order_of(first.frequency, second.frequency)


def gain_margin(crossings: Sequence[PhaseCrossing], *directions: Direction) -> Answer:
    """Return the least factor > 1 by which the gain may rise (`up`) or fall (`down`)."""
    wanted = {"up": (0, 1), "down": (0, -1)}
    return _least(
        Candidate(_beyond_one(one), _at(one.frequency, direction))
        for direction in directions
        for one in crossings
        if one.rise in wanted[direction]
    )


def phase_margin(crossings: Sequence[GainCrossing], *directions: Direction) -> Answer:
    """Return the least turn (rad) by `lag`, `lead` or either."""
    return _least(
        Candidate(_turned(one, direction), _at(one.frequency, direction))
        for one in crossings
        for direction in directions
        if len(directions) == 1 or one.side in _NEARER[direction]
    )


_NEARER: Mapping[Direction, tuple[Sign, ...]] = {"lag": (0, 1), "lead": (-1,)}


def delay_margin(crossings: Sequence[GainCrossing]) -> Answer:
    """Return the least of lag over frequency (s); no dead time turns anything at zero frequency."""
    return _least(
        Candidate(quotient(_turned(one, "lag"), one.frequency), {"frequency": one.frequency})
        for one in crossings
        if one.frequency.exact != 0 and one.frequency.absent is None
    )


def _least(candidates: Iterable[Candidate]) -> Answer:
    found = least(candidates)
    return Answer.nothing(NOT_USED_UP, infinite=True) if found is None else found.answer


def _at(frequency: Answer, direction: Direction) -> Mapping[str, Answer | str]:
    return {"frequency": frequency, "direction": direction}


def _beyond_one(crossing: PhaseCrossing) -> Answer:
    """Return the factor or its reciprocal, whichever is not below one."""
    return crossing.factor if crossing.rise >= 0 else reciprocal(crossing.factor)


def _turned(crossing: GainCrossing, direction: Direction) -> Answer:
    """Return the turn in one direction (rad, in [0, 2 pi)): the way round is the rest of a whole turn."""
    turn = crossing.turn
    if turn.exact is not None or crossing.side == 0 or (crossing.side > 0) == (direction == "lag"):
        return turn

    def refine(bits: int) -> arb:
        ball = turn.enclose(bits + 8)
        with working_precision(bits + 8):
            return 2 * arb.pi() - ball

    return Answer(Proof.ENCLOSED, refine=refine, against=the_way_round(turn.against))
