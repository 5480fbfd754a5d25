"""An open loop with dead time over frequency: margins, peaks and values, from its crossings (`crossings`)."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import replace
from functools import cached_property

from flint import fmpq

from specgate.delays import recording
from specgate.delays.crossings import LateCrossings, within
from specgate.delays.magnitude import DelayedMagnitude
from specgate.delays.masks import late_inside
from specgate.delays.phase import late_phase
from specgate.delays.tangencies import near_gain, near_phase
from specgate.frequency import margins
from specgate.frequency.choose import Candidate, least
from specgate.frequency.fragile import Watch
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.questions import Crossing, Direction, Range
from specgate.frequency.rational_loop import UNSTABLE
from specgate.frequency.recording import UNIT, of_roots
from specgate.frequency.scale import Continuous
from specgate.frequency.sided import SidedMargins
from specgate.frequency.values import reciprocal
from specgate.response.accounts import Account
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.questions import Mask
from specgate.systems.delayed_network import DelayedTransfer


class DelayedLoop(SidedMargins):
    """L = numerator/denominator, no common factor; stable: of the closed loop with every mode (None: not decided)."""

    def __init__(self, open_loop: DelayedTransfer, stable: bool | None, unstable: str = UNSTABLE) -> None:
        self.transfer = open_loop
        self._crossings = LateCrossings(open_loop)
        self._stable, self._unstable = stable, unstable

    # --- crossings ----------------------------------------------------------------------------------------

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return all crossings up to where none matters any more, by frequency; none where they were not all found."""
        try:
            return margins.described(within(self._crossings.gain, over), self._crossings.phase_over(over))
        except OutOfWork:
            return ()

    # --- margins ------------------------------------------------------------------------------------------

    def _missing(self) -> Answer | None:
        if self._stable is None:
            return Answer.undecided("whether the closed loop is stable was not decided")
        return None if self._stable else Answer.nothing(self._unstable)

    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        def decide(some: Sequence[PhaseCrossing]) -> Answer:
            return margins.gain_margin(some, *directions)

        def found() -> Answer:
            crossings = self._crossings
            answer = self._by_phase(decide(crossings.phase_over(over)))
            if over is not None:
                return answer
            if "up" in directions and not any(one.rise > 0 for one in crossings.phase):
                return Answer.undecided("no crossing was found up to where the gain is a trillionth of one")
            return self._near_phase.warned(answer, decide)

        return self._missing() or _within_limits(found)

    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        return self._from_gain(over, lambda some: margins.phase_margin(some, *directions))

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time (s) that brings L to -1: least lag over frequency, 0 where |L(inf)| >= 1."""
        if over is None and self._missing() is None and self._strong_at_infinity():
            return Answer.of_exact(0)
        return self._from_gain(over, margins.delay_margin)

    def _from_gain(self, over: Range | None, decide: Callable[[Sequence[GainCrossing]], Answer]) -> Answer:
        """Return a margin that the points with |L| = 1 decide."""

        def found() -> Answer:
            answer = self._by_gain(decide(within(self._crossings.gain, over)))
            return answer if over is not None else self._near_gain.warned(answer, decide)

        return self._missing() or _within_limits(found)

    @cached_property
    def _near_gain(self) -> Watch[GainCrossing]:
        return near_gain(self._crossings)

    @cached_property
    def _near_phase(self) -> Watch[PhaseCrossing]:
        return near_phase(self._crossings)

    def _by_gain(self, answer: Answer) -> Answer:
        """Say that an answer comes from where |L| = 1."""
        rational, count = self._crossings.undelayed, len(self._crossings.gain)
        if rational is None:
            return answer.accounted(lambda: Account(recording.UNIT, recording.AXIS, count))
        excess = rational.axis.above - rational.axis.below
        return answer.accounted(lambda: of_roots(UNIT, Continuous(), excess, **{"gain crossings": count}))

    def _by_phase(self, answer: Answer) -> Answer:
        """Say that an answer comes from where L is real and negative."""
        count = len(self._crossings.phase)
        return answer.accounted(lambda: Account(recording.REAL, recording.AXIS, count))

    def _strong_at_infinity(self) -> bool:
        """Whether |L| is one or more at infinite frequency, where dead time is a factor of L."""
        rational = self._crossings.undelayed
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
        return peak if peak.absent is not None else replace(reciprocal(peak), at=peak.at, how=peak.how)

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s); further ones are in `crossings`."""
        none = "the gain of the open loop is one at no frequency"
        return _within_limits(lambda: self._by_gain(_first(within(self._crossings.gain, over), none)))

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""
        none = "the open loop is real and negative at no frequency that matters"
        return _within_limits(lambda: self._by_phase(_first(self._crossings.phase_over(over), none)))

    def peak_gain(self, over: Range | None = None) -> Answer:
        """Return sup |L|."""
        if self._crossings.undelayed is not None:
            return self._crossings.undelayed.peak_gain(over)
        return DelayedMagnitude(self.transfer.numerator, self.transfer.denominator).supremum(over)

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L(j frequency)|."""
        if self._crossings.undelayed is not None:
            return self._crossings.undelayed.gain_at(frequency)
        return DelayedMagnitude(self.transfer.numerator, self.transfer.denominator).at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L(j frequency), followed from zero frequency (rad)."""
        return late_phase(self.transfer, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency."""
        if self._crossings.undelayed is not None:
            return self._crossings.undelayed.within(mask)
        return late_inside(self.transfer, mask)


def _within_limits(task: Callable[[], Answer]) -> Answer:
    try:
        return task()
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)


def _first(crossings: Iterable[GainCrossing | PhaseCrossing], none: str) -> Answer:
    found = least(Candidate(one.frequency, {}) for one in crossings if one.frequency.absent is None)
    return Answer.nothing(none) if found is None else replace(found.value, at=None)
