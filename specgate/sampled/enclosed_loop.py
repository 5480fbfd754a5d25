"""Margins, crossings and peaks of a loop in z whose coefficients are enclosed; omega from 0 to pi/T.

The two ends are candidates of their own: at omega = 0 L(1) is rational or infinite, known from slow signals, at pi/T
L(-1) is real. Everything in between are roots of polynomials in x (`enclosed_axis`).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace

from flint import arb, fmpq

from specgate.frequency import margins
from specgate.frequency.choose import Candidate, least
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.questions import Crossing, Direction, Range
from specgate.frequency.rational_loop import UNSTABLE
from specgate.frequency.recording import REAL, STILL, UNIT
from specgate.frequency.sided import SidedMargins
from specgate.frequency.values import reciprocal
from specgate.response.answers import Answer
from specgate.sampled.enclosed_axis import Crossed, Untold
from specgate.sampled.enclosed_curve import (
    EnclosedCurve,
    above,
    below,
    excess,
    imaginary,
    real,
    sensitive,
    squared,
    still,
    sum_,
    told,
)
from specgate.sampled.scale import Tangent
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_Place = Crossed | Tangent


class EnclosedLoop(EnclosedCurve, SidedMargins):
    """L(z) at the samples of a loop. slow: L of slow signals. at_one: L(1), None where it is infinite (exact)."""

    def __init__(
        self,
        transfer: PulseTransfer,
        slow: TransferFunction,
        at_one: fmpq | None,
        period: fmpq,
        late: Callable[[], Answer] | None,
        *,
        stable: bool,
    ) -> None:
        super().__init__(transfer, slow, at_one, period)
        self._stable = stable
        self._late = late

    # --- crossings ----------------------------------------------------------------------------------------

    def _gain_crossings(self, over: Range | None) -> tuple[GainCrossing, ...]:
        found = [self._gain_crossing(one) for one in self._roots("excess", excess, over)]
        if self._has_start(over) and self._at_one is not None and abs(self._at_one) == 1:
            turn = Answer.of_exact(0) if self._at_one < 0 else Answer(Proof.ENCLOSED, refine=_pi)
            found.insert(0, GainCrossing(Answer.of_exact(0), turn, 0))
        return tuple(found)

    def _gain_crossing(self, place: Crossed) -> GainCrossing:
        side = self._axis.sign(place, imaginary)

        def refine(bits: int) -> arb:
            precision = bits + 32
            while True:
                x, balls = place.enclose(precision), self._axis.at(2 * precision)
                with working_precision(precision):
                    angle = arb.atan2(abs(balls.imaginary(x)) * x.sqrt(), -balls.real(x))
                if angle.rel_accuracy_bits() >= bits or precision > HIGHEST:
                    return angle
                precision *= 2

        return GainCrossing(self._frequency(place), Answer(Proof.ENCLOSED, refine=refine), 1 if side < 0 else -1)

    def _phase_crossings(self, over: Range | None) -> tuple[PhaseCrossing, ...]:
        found: list[PhaseCrossing] = []
        if self._has_start(over) and self._at_one is not None and self._at_one < 0:
            factor = -1 / self._at_one
            found.append(PhaseCrossing(Answer.of_exact(0), Answer.of_exact(factor), (factor > 1) - (factor < 1)))  # type: ignore[arg-type]
        for place in self._roots("imaginary", imaginary, over):
            if self._axis.sign(place, real) < 0:
                factor_there = self._axis.ratio(place, below, lambda balls: -balls.real)
                rise = self._axis.sign(place, lambda balls: balls.below + balls.real)
                found.append(PhaseCrossing(self._frequency(place), factor_there, rise))
        if self._has_end(over) and not self._pole_at_end and self._compared_at_end(0) < 0:
            inverse = Answer(Proof.ENCLOSED, refine=lambda bits: -1 / self._at_end(bits + 8))
            found.append(PhaseCrossing(self._end, inverse, self._compared_at_end(-1)))
        return tuple(found)

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return all crossings, by frequency; none where they are not told."""
        try:
            return margins.described(self._gain_crossings(over), self._phase_crossings(over))
        except Untold:
            return ()

    # --- margins ------------------------------------------------------------------------------------------

    def _of_stable(self, ask: Callable[[], Answer]) -> Answer:
        return told(ask) if self._stable else Answer.nothing(UNSTABLE)

    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        found = self._of_stable(lambda: margins.gain_margin(self._phase_crossings(over), *directions))
        return found.accounted(self._account(REAL, "imaginary", imaginary))

    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        found = self._of_stable(lambda: margins.phase_margin(self._gain_crossings(over), *directions))
        return found.accounted(self._account(UNIT, "excess", excess))

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time that makes the loop unstable; it belongs to no frequency."""
        return delay_stood(self._late, over, stable=self._stable)

    # --- peaks --------------------------------------------------------------------------------------------

    def sensitivity_peak(self, over: Range | None = None) -> Answer:
        """Return sup |1 / (1 + L)|."""
        found = self._of_stable(lambda: self._sensitivity(over))
        return found.accounted(self._account(STILL, "sensitive", sensitive))

    def _sensitivity(self, over: Range | None) -> Answer:
        start = fmpq(0) if self._at_one is None else 1 / (1 + self._at_one) ** 2
        end = Answer.of_exact(0) if self._pole_at_end else squared(lambda bits: 1 / (1 + self._at_end(bits + 8)))
        return self._supremum("sensitive", sensitive, (below, sum_), Answer.of_exact(start), end, over)

    def least_distance(self, over: Range | None = None) -> Answer:
        """Return inf |1 + L|."""
        peak = self.sensitivity_peak(over)
        if peak.absent is not None:
            return peak
        return replace(reciprocal(peak), at=peak.at)

    def peak_gain(self, over: Range | None = None) -> Answer:
        """Return sup |L|."""
        infinite = (self._at_one is None and self._has_start(over)) or (self._pole_at_end and self._has_end(over))
        if infinite:
            return Answer.nothing("the gain grows without bound", infinite=True)
        start = Answer.of_exact(self._at_one**2) if self._at_one is not None else None
        end = None if self._pole_at_end else squared(self._at_end)
        return told(lambda: self._supremum("still", still, (above, below), start, end, over))

    # --- frequencies --------------------------------------------------------------------------------------

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s)."""
        none = "the gain of the open loop is one at no frequency"
        found = told(lambda: _first(self._gain_crossings(over), none))
        return found.accounted(self._account(UNIT, "excess", excess))

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""
        none = "the open loop is real and negative at no frequency"
        found = told(lambda: _first(self._phase_crossings(over), none))
        return found.accounted(self._account(REAL, "imaginary", imaginary))


def delay_stood(late: Callable[[], Answer] | None, over: Range | None, *, stable: bool) -> Answer:
    """Return the dead time that a sampled loop stands; late: how it is found, None where no loop passes here."""
    if not stable:
        return Answer.nothing(UNSTABLE)
    if over is not None:
        return Answer.undecided("the dead time that a sampled loop stands belongs to no frequency: ask without a range")
    return Answer.nothing(margins.NOT_USED_UP, infinite=True) if late is None else late()


def _first(crossings: Iterable[GainCrossing | PhaseCrossing], none: str) -> Answer:
    found = least(Candidate(one.frequency, {}) for one in crossings)
    return Answer.nothing(none) if found is None else replace(found.value, at=None)


def _pi(bits: int) -> arb:
    with working_precision(bits):
        return arb.pi()
