"""Where an open loop with dead time has the gain one, and where it is real and negative.

Where |L| = 1 is a polynomial condition (dead time is a factor of L), gain crossings are exact. All other zeros (the
phase crossings, and gain crossings of loops that hold a dead time inside) are isolated in balls, from a frequency below
which there is none up to one beyond which none matters:

- no gain crossing lies where |L| < 1 for good;
- a dead time turns the phase without end, so that phase crossings have no last one (`endless` where the gain has not
  zero as its limit). Beyond a frequency from which on
  k |L| < 1, no factor up to k destabilises: all crossings are listed up to where this holds for the k of the first one
  with |L| < 1, which is at least the margin. Those left out are all further away from -1.

By Lindemann's theorem no crossing with dead time has a phase of exactly 0 or 180 degrees (see `quasi_stability`).
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from typing import Literal, TypeVar

from flint import arb, fmpq

from specgate.delays.axis import DelayedAxis, mirrored
from specgate.delays.endless import End, end_of
from specgate.delays.isolate import Crossing as Zero
from specgate.delays.isolate import isolate
from specgate.frequency.choose import order
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.questions import Range
from specgate.frequency.rational_loop import RationalLoop
from specgate.frequency.scale import Continuous
from specgate.frequency.spots import positive_roots
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

_LEAST = fmpq(1, 2**40)
"""Gain below which no crossing is looked for any more."""

_MOST_TURNS = 60
"""Turns by the dead time within which a crossing is looked for where the gain falls to its limit."""

_FAR = "how the loop behaves at high frequency, where its gain does not fall below one, is not decided"
_TOUCHES = "whether the gain of the open loop passes one or only comes close to it was not told"


class LateCrossings:
    """The crossings of L = numerator/denominator, no common factor. What is not found raises OutOfWork."""

    def __init__(self, open_loop: DelayedTransfer) -> None:
        self.transfer = open_loop
        self.axis = DelayedAxis(open_loop)

    @cached_property
    def undelayed(self) -> RationalLoop | None:
        """L with its dead time taken off, where that is a factor of it: it has the same magnitude."""
        above = self.transfer.numerator.terms
        if len(above) != 1 or not self.transfer.denominator.is_rational:
            return None
        return RationalLoop(TransferFunction(above[0][1], self.transfer.denominator.undelayed), stable=True)

    @cached_property
    def gain(self) -> tuple[GainCrossing, ...]:
        """Where |L| = 1. Raises OutOfWork."""
        at_zero = self.axis.at_zero
        found = [self.gain_crossing(Answer.of_exact(0))] if at_zero is not None and abs(at_zero) == 1 else []
        rational = self.undelayed
        if rational is not None:
            excess = rational.axis.above - rational.axis.below
            if not excess:
                raise OutOfWork("the gain of the open loop is one at every frequency")
            spots = positive_roots(excess)
            return (*found, *(self.gain_crossing(Continuous().frequency(spot)) for spot in spots))
        return (*found, *(self.gain_crossing(Answer.of_ball(zero.enclose)) for zero in self._gain_zeros()))

    def _gain_zeros(self) -> Sequence[Zero]:
        end = self.axis.below_one_beyond(fmpq(1))
        if end is None:
            raise OutOfWork(_FAR)
        start = self.start_of("excess")
        if start == 0:
            raise OutOfWork(_TOUCHES)
        if end <= start:
            return ()
        zeros = isolate(self.axis.excess, start, end)
        if zeros.untold:
            raise OutOfWork(_TOUCHES)
        return zeros.crossings

    def start_of(self, kind: Literal["imaginary", "excess"]) -> fmpq:
        """Return a frequency up to which Im(N conj D), or |N|^2 - |D|^2, vanishes at most at 0; 0: not told."""
        above, below = self.axis.numerator, self.axis.denominator
        if kind == "imaginary":
            return self.axis.start_of(above * mirrored(below), odd=True)
        excess = above * mirrored(above) + (below * mirrored(below)).scaled(fmpq(-1))
        return self.axis.start_of(excess, odd=False)

    def gain_crossing(self, frequency: Answer) -> GainCrossing:
        """Return a frequency with |L| = 1 as a crossing."""
        if frequency.exact == 0:
            at_zero = self.axis.at_zero
            turn = Answer.of_exact(0) if at_zero == -1 else Answer.of_ball(_pi)
            return GainCrossing(frequency, turn, 0)
        bits, angle = 64, self._angle(frequency, 64)
        while not (angle > 0 or angle < 0) and bits <= 4096:
            bits *= 2
            angle = self._angle(frequency, bits)
        lags = bool(angle > 0)
        return GainCrossing(
            frequency, Answer.of_ball(lambda asked: abs(self._angle(frequency, asked))), 1 if lags else -1
        )

    def _angle(self, frequency: Answer, bits: int) -> arb:
        """Return the angle of -L, in (-pi, pi]."""
        ball = frequency.enclose(bits + 24)
        with working_precision(bits + 24):
            return (-self.axis.ratio(ball, bits + 24)).arg()

    @cached_property
    def phase(self) -> tuple[PhaseCrossing, ...]:
        """Where L is real and negative, as far as it matters. Raises OutOfWork."""
        at_zero = self.axis.at_zero
        found: list[PhaseCrossing] = []
        if at_zero is not None and at_zero < 0:
            rise = 1 if at_zero > -1 else -1 if at_zero < -1 else 0
            found.append(PhaseCrossing(Answer.of_exact(0), Answer.of_exact(-1 / at_zero), 1 if rise > 0 else -1))
        start = self.start_of("imaginary")
        if start == 0:
            raise OutOfWork("the phase of the open loop stands still at low frequency")
        reached, weakest = start, fmpq(1)
        while True:
            end = self.axis.below_one_beyond(weakest)
            if end is None:
                return (*found, *self._endless(reached))
            found += self._phase_between(reached, end)
            reached = max(reached, end)
            ups = [one for one in found if one.rise > 0]
            if ups:
                last = self.last_end(ups)
                further = self._endless(reached) if last is None else self._phase_between(reached, last)
                return (*found, *further)
            weakest = weakest * 2
            if weakest * _LEAST > 1:
                return tuple(found)

    def _endless(self, reached: fmpq) -> list[PhaseCrossing]:
        """Return the crossings from a frequency on that matter, where the gain does not tend to zero (`endless`)."""
        end, delay = self._end, self.transfer.numerator.terms[0][0]
        if end is None or delay == 0:
            raise OutOfWork(_FAR)
        found = self._phase_between(reached, end.since)
        reached = max(reached, end.since)
        for _ in range(_MOST_TURNS):
            following = reached + 7 / delay
            found += self._phase_between(reached, following)
            if any(one.rise > 0 for one in found):
                return found if end.direction < 0 else [*found, end.crossing]
            reached = following
        raise OutOfWork(_FAR)

    def phase_over(self, over: Range | None) -> tuple[PhaseCrossing, ...]:
        """Return the crossings that matter, or all in a range. Raises OutOfWork."""
        if over is None:
            return self.phase
        known = within(self.phase, over)
        placed = [one.frequency for one in self.phase if one.frequency.absent is None]
        reached = max((frequency.enclose(64).upper().fmpq() for frequency in placed), default=fmpq(0))
        return (*known, *self._phase_between(max(over[0], reached), over[1]))

    def last_end(self, ups: Sequence[PhaseCrossing]) -> fmpq | None:
        """Return the frequency beyond which no crossing is nearer to -1 than the nearest of some; None: none found."""
        return self.axis.below_one_beyond(min(one.factor.enclose(64).upper().fmpq() for one in ups))

    def _phase_between(self, start: fmpq, end: fmpq) -> list[PhaseCrossing]:
        if end <= start:
            return []
        zeros = isolate(self.axis.imaginary, start, end)
        if zeros.untold:
            raise OutOfWork("whether the open loop crosses the real axis or only touches it was not told")
        return [found for zero in zeros.crossings if (found := self.phase_crossing(zero)) is not None]

    def phase_crossing(self, zero: Zero) -> PhaseCrossing | None:
        """Return a zero of Im L as a crossing, None where L is positive there."""

        def factor(bits: int) -> arb:
            ball = zero.enclose(bits + 24)
            with working_precision(bits + 24):
                above, below = self.axis.parts(ball, bits + 24)
                return -(below / above).real

        bits, value = 64, factor(64)
        while bits <= 4096 and not (value < 0 or (value > 0 and not value.contains(1))):
            bits *= 2
            value = factor(bits)
        if not value > 0:
            return None
        # A gain that is the same everywhere leaves the same factor everywhere, exactly.
        level = self._end if self._end is not None and self._end.direction == 0 else None
        left = Answer.of_ball(factor) if level is None else level.crossing.factor
        return PhaseCrossing(Answer.of_ball(zero.enclose), left, 1 if value > 1 else -1)

    @cached_property
    def _end(self) -> End | None:
        """How the gain ends where it tends to a limit that is not zero."""
        rational = self.undelayed
        return None if rational is None else end_of(rational.axis.numerator, rational.axis.denominator)


def _pi(bits: int) -> arb:
    with working_precision(bits):
        return arb.pi()


Kind = TypeVar("Kind", GainCrossing, PhaseCrossing)


def within(crossings: Sequence[Kind], over: Range | None) -> tuple[Kind, ...]:
    """Return the crossings in a closed range; one that is not told from its end counts."""
    if over is None:
        return tuple(crossings)
    low, high = (Answer.of_exact(end) for end in over)
    return tuple(
        one
        for one in crossings
        if one.frequency.absent is None
        and order(one.frequency, low) in (None, 0, 1)
        and order(one.frequency, high) in (None, 0, -1)
    )
