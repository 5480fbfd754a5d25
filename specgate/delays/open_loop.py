"""An open loop with dead time over frequency: crossings, margins and peaks.

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

from collections.abc import Iterable, Sequence
from dataclasses import replace
from functools import cached_property
from typing import TypeVar

from flint import arb, fmpq

from specgate.delays.axis import DelayedAxis, mirrored
from specgate.delays.endless import End, end_of
from specgate.delays.isolate import Crossing as Zero
from specgate.delays.isolate import isolate
from specgate.delays.magnitude import DelayedMagnitude
from specgate.delays.masks import late_inside
from specgate.delays.phase import late_phase
from specgate.frequency import margins
from specgate.frequency.choose import Candidate, least, order
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.questions import Crossing, Direction, Range
from specgate.frequency.rational_loop import UNSTABLE, RationalLoop
from specgate.frequency.scale import Continuous
from specgate.frequency.sided import SidedMargins
from specgate.frequency.spots import positive_roots
from specgate.frequency.values import reciprocal
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.questions import Mask
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

_LEAST = fmpq(1, 2**40)
"""Gain below which no crossing is looked for any more."""

_MOST_TURNS = 60
"""Turns by the dead time within which a crossing is looked for where the gain falls to its limit."""

_FAR = "how the loop behaves at high frequency, where its gain does not fall below one, is not decided"
_TOUCHES = "whether the gain of the open loop passes one or only comes close to it was not told"


class DelayedLoop(SidedMargins):
    """L = numerator/denominator, no common factor; stable: of the closed loop with every mode (None: not decided)."""

    def __init__(self, open_loop: DelayedTransfer, stable: bool | None, unstable: str = UNSTABLE) -> None:
        self.transfer = open_loop
        self.axis = DelayedAxis(open_loop)
        self._stable, self._unstable = stable, unstable

    @cached_property
    def _undelayed(self) -> RationalLoop | None:
        """L with its dead time taken off, where that is a factor of it: it has the same magnitude."""
        above = self.transfer.numerator.terms
        if len(above) != 1 or not self.transfer.denominator.is_rational:
            return None
        return RationalLoop(TransferFunction(above[0][1], self.transfer.denominator.undelayed), stable=True)

    # --- crossings ----------------------------------------------------------------------------------------

    @cached_property
    def _gain(self) -> tuple[GainCrossing, ...]:
        """Where |L| = 1. Raises OutOfWork."""
        at_zero = self.axis.at_zero
        found = [self._gain_crossing(Answer.of_exact(0))] if at_zero is not None and abs(at_zero) == 1 else []
        rational = self._undelayed
        if rational is not None:
            excess = rational.axis.above - rational.axis.below
            if not excess:
                raise OutOfWork("the gain of the open loop is one at every frequency")
            spots = positive_roots(excess)
            return (*found, *(self._gain_crossing(Continuous().frequency(spot)) for spot in spots))
        return (*found, *(self._gain_crossing(Answer.of_ball(zero.enclose)) for zero in self._gain_zeros()))

    def _gain_zeros(self) -> Sequence[Zero]:
        end = self.axis.below_one_beyond(fmpq(1))
        if end is None:
            raise OutOfWork(_FAR)
        above, below = self.axis.numerator, self.axis.denominator
        excess = above * mirrored(above) + (below * mirrored(below)).scaled(fmpq(-1))
        start = self.axis.start_of(excess, odd=False)
        if start == 0:
            raise OutOfWork(_TOUCHES)
        if end <= start:
            return ()
        zeros = isolate(self.axis.excess, start, end)
        if zeros.untold:
            raise OutOfWork(_TOUCHES)
        return zeros.crossings

    def _gain_crossing(self, frequency: Answer) -> GainCrossing:
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
    def _phase(self) -> tuple[PhaseCrossing, ...]:
        """Where L is real and negative, as far as it matters. Raises OutOfWork."""
        at_zero = self.axis.at_zero
        found: list[PhaseCrossing] = []
        if at_zero is not None and at_zero < 0:
            rise = 1 if at_zero > -1 else -1 if at_zero < -1 else 0
            found.append(PhaseCrossing(Answer.of_exact(0), Answer.of_exact(-1 / at_zero), 1 if rise > 0 else -1))
        start = self.axis.start_of(self.axis.numerator * mirrored(self.axis.denominator), odd=True)
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
                last = self._last_end(ups)
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

    def _phase_over(self, over: Range | None) -> tuple[PhaseCrossing, ...]:
        """Return the crossings that matter, or all in a range. Raises OutOfWork."""
        if over is None:
            return self._phase
        known = _within(self._phase, over)
        placed = [one.frequency for one in self._phase if one.frequency.absent is None]
        reached = max((frequency.enclose(64).upper().fmpq() for frequency in placed), default=fmpq(0))
        return (*known, *self._phase_between(max(over[0], reached), over[1]))

    def _last_end(self, ups: Sequence[PhaseCrossing]) -> fmpq | None:
        """Return the frequency beyond which no crossing is nearer to -1 than the nearest of some; None: none found."""
        return self.axis.below_one_beyond(min(one.factor.enclose(64).upper().fmpq() for one in ups))

    def _phase_between(self, start: fmpq, end: fmpq) -> list[PhaseCrossing]:
        if end <= start:
            return []
        zeros = isolate(self.axis.imaginary, start, end)
        if zeros.untold:
            raise OutOfWork("whether the open loop crosses the real axis or only touches it was not told")
        return [found for zero in zeros.crossings if (found := self._phase_crossing(zero)) is not None]

    def _phase_crossing(self, zero: Zero) -> PhaseCrossing | None:
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
        rational = self._undelayed
        return None if rational is None else end_of(rational.axis.numerator, rational.axis.denominator)

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return all crossings up to where none matters any more, by frequency; none where they were not all found."""
        try:
            return margins.described(_within(self._gain, over), self._phase_over(over))
        except OutOfWork:
            return ()

    # --- margins ------------------------------------------------------------------------------------------

    def _missing(self) -> Answer | None:
        if self._stable is None:
            return Answer.undecided("whether the closed loop is stable was not decided")
        return None if self._stable else Answer.nothing(self._unstable)

    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        missing = self._missing()
        if missing is not None:
            return missing
        try:
            found = margins.gain_margin(self._phase_over(over), *directions)
            told = over is not None or any(one.rise > 0 for one in self._phase) or "up" not in directions
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)
        return found if told else Answer.undecided("no crossing was found up to where the gain is a trillionth of one")

    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        missing = self._missing()
        if missing is not None:
            return missing
        try:
            return margins.phase_margin(_within(self._gain, over), *directions)
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time (s) that brings L to -1: least lag over frequency, 0 where |L(inf)| >= 1."""
        missing = self._missing()
        if missing is not None:
            return missing
        if over is None and self._strong_at_infinity():
            return Answer.of_exact(0)
        try:
            return margins.delay_margin(_within(self._gain, over))
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

    def _strong_at_infinity(self) -> bool:
        """Whether |L| is one or more at infinite frequency, where dead time is a factor of L."""
        rational = self._undelayed
        if rational is None:
            return False
        above, below = rational.axis.numerator, rational.axis.denominator
        return above.degree() > below.degree() or (
            above.degree() == below.degree() and abs(above.leading_coefficient()) >= abs(below.leading_coefficient())
        )

    # --- peaks and frequencies ----------------------------------------------------------------------------

    @cached_property
    def _sensitivity(self) -> DelayedMagnitude:
        below = self.transfer.denominator
        return DelayedMagnitude(below, below + self.transfer.numerator)

    def sensitivity_peak(self, over: Range | None = None) -> Answer:
        """Return sup |1 / (1 + L)|; `at` has the frequency, absent with `infinite` where approached there."""
        return self._missing() or self._sensitivity.supremum(over)

    def least_distance(self, over: Range | None = None) -> Answer:
        """Return inf |1 + L|."""
        peak = self.sensitivity_peak(over)
        return peak if peak.absent is not None else replace(reciprocal(peak), at=peak.at)

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s); further ones are in `crossings`."""
        try:
            return _first(_within(self._gain, over), "the gain of the open loop is one at no frequency")
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""
        try:
            return _first(self._phase_over(over), "the open loop is real and negative at no frequency that matters")
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

    def peak_gain(self, over: Range | None = None) -> Answer:
        """Return sup |L|."""
        if self._undelayed is not None:
            return self._undelayed.peak_gain(over)
        return DelayedMagnitude(self.transfer.numerator, self.transfer.denominator).supremum(over)

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L(j frequency)|."""
        if self._undelayed is not None:
            return self._undelayed.gain_at(frequency)
        return DelayedMagnitude(self.transfer.numerator, self.transfer.denominator).at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L(j frequency), followed from zero frequency (rad)."""
        return late_phase(self.transfer, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency."""
        if self._undelayed is not None:
            return self._undelayed.within(mask)
        return late_inside(self.transfer, mask)


def _pi(bits: int) -> arb:
    with working_precision(bits):
        return arb.pi()


Kind = TypeVar("Kind", GainCrossing, PhaseCrossing)


def _within(crossings: Sequence[Kind], over: Range | None) -> tuple[Kind, ...]:
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


def _first(crossings: Iterable[GainCrossing | PhaseCrossing], none: str) -> Answer:
    found = least(Candidate(one.frequency, {}) for one in crossings if one.frequency.absent is None)
    return Answer.nothing(none) if found is None else replace(found.value, at=None)
