"""Margins, crossings and peaks of a loop in z whose coefficients are enclosed; omega from 0 to pi/T.

The two ends are candidates of their own: at omega = 0 L(1) is rational or infinite, known from slow signals, at pi/T
L(-1) is real. Everything in between are roots of polynomials in x (`enclosed_axis`).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from functools import cached_property

from flint import arb, arb_poly, fmpq

from specgate.frequency import margins
from specgate.frequency.choose import Candidate, greatest, least
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.questions import Crossing, Direction, Range
from specgate.frequency.rational_loop import UNSTABLE
from specgate.frequency.sided import SidedMargins
from specgate.frequency.spots import Infinity, Sign
from specgate.frequency.values import reciprocal, root_of
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.sampled.enclosed_axis import Axis, Balls, Crossed, Pick, Untold
from specgate.sampled.phase import phase_at
from specgate.sampled.scale import BEYOND, SampledScale, Tangent
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_Place = Crossed | Tangent


class EnclosedLoop(SidedMargins):
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
        self._transfer = transfer
        self._slow = slow
        self._at_one = at_one
        self._axis = Axis(transfer, unit_at_one=at_one is not None and abs(at_one) == 1)
        self._scale = SampledScale(period)
        self._stable = stable
        self._late = late

    # --- the ends -----------------------------------------------------------------------------------------

    @cached_property
    def _pole_at_end(self) -> bool:
        return bool(self._transfer.denominator(-1) == 0)

    @cached_property
    def _zero_at_end(self) -> bool:
        return bool(self._transfer.numerator(-1) == 0)

    def _at_end(self, bits: int) -> arb:
        """Return L(-1)."""
        precision = bits + 64
        while True:
            above, below = self._transfer.in_z(2 * precision)
            with working_precision(precision):
                value = above(arb(-1)) / below(arb(-1))
            if value.rel_accuracy_bits() >= bits or precision > HIGHEST or self._zero_at_end:
                return value
            precision *= 2

    def _compared_at_end(self, with_: int) -> Sign:
        """Return the sign of L(-1) minus a whole number. Raises Untold."""
        if self._zero_at_end:
            return -1 if with_ > 0 else int(with_ < 0)  # type: ignore[return-value]
        bits = 64
        while bits <= 1024:
            value = self._at_end(bits)
            if value > with_ or value < with_:
                return 1 if value > with_ else -1
            bits *= 2
        raise Untold("whether the open loop reaches one at half the sampling rate is not told")

    @cached_property
    def _end(self) -> Answer:
        return self._scale.frequency(Infinity())

    def _has_end(self, over: Range | None) -> bool:
        return over is None or self._scale.compare(Infinity(), over[1]) <= 0

    def _has_start(self, over: Range | None) -> bool:
        return over is None or over[0] == 0

    # --- crossings ----------------------------------------------------------------------------------------

    def _roots(self, name: str, pick: Pick, over: Range | None) -> list[Crossed]:
        found = self._axis.roots(name, pick)
        if over is None:
            return list(found)
        return [one for one in found if self._compare(one, over[0]) >= 0 >= self._compare(one, over[1])]

    def _compare(self, place: Crossed, frequency: fmpq) -> int:
        if frequency == 0:
            return 1
        bits = 64
        while bits <= 1024:
            ball = self._frequency(place).enclose(bits)
            with working_precision(bits):
                difference = ball - arb(frequency)
            if difference > 0 or difference < 0:
                return 1 if difference > 0 else -1
            bits *= 2
        raise Untold("a crossing could not be told from an end of the range")

    def _frequency(self, place: _Place) -> Answer:
        return Answer(Proof.ENCLOSED, refine=lambda bits: self._scale.angle(place, bits))

    def _gain_crossings(self, over: Range | None) -> tuple[GainCrossing, ...]:
        found = [self._gain_crossing(one) for one in self._roots("excess", _excess, over)]
        if self._has_start(over) and self._at_one is not None and abs(self._at_one) == 1:
            turn = Answer.of_exact(0) if self._at_one < 0 else Answer(Proof.ENCLOSED, refine=_pi)
            found.insert(0, GainCrossing(Answer.of_exact(0), turn, 0))
        return tuple(found)

    def _gain_crossing(self, place: Crossed) -> GainCrossing:
        imaginary = self._axis.sign(place, _imaginary)

        def refine(bits: int) -> arb:
            precision = bits + 32
            while True:
                x, balls = place.enclose(precision), self._axis.at(2 * precision)
                with working_precision(precision):
                    angle = arb.atan2(abs(balls.imaginary(x)) * x.sqrt(), -balls.real(x))
                if angle.rel_accuracy_bits() >= bits or precision > HIGHEST:
                    return angle
                precision *= 2

        return GainCrossing(self._frequency(place), Answer(Proof.ENCLOSED, refine=refine), 1 if imaginary < 0 else -1)

    def _phase_crossings(self, over: Range | None) -> tuple[PhaseCrossing, ...]:
        found: list[PhaseCrossing] = []
        if self._has_start(over) and self._at_one is not None and self._at_one < 0:
            factor = -1 / self._at_one
            found.append(PhaseCrossing(Answer.of_exact(0), Answer.of_exact(factor), (factor > 1) - (factor < 1)))  # type: ignore[arg-type]
        for place in self._roots("imaginary", _imaginary, over):
            if self._axis.sign(place, _real) < 0:
                factor_there = self._axis.ratio(place, _below, lambda balls: -balls.real)
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
        return _told(ask) if self._stable else Answer.nothing(UNSTABLE)

    def _gain_margin(self, over: Range | None, *directions: Direction) -> Answer:
        return self._of_stable(lambda: margins.gain_margin(self._phase_crossings(over), *directions))

    def _phase_margin(self, over: Range | None, *directions: Direction) -> Answer:
        return self._of_stable(lambda: margins.phase_margin(self._gain_crossings(over), *directions))

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time that makes the loop unstable; it belongs to no frequency."""
        return delay_stood(self._late, over, stable=self._stable)

    # --- peaks --------------------------------------------------------------------------------------------

    def sensitivity_peak(self, over: Range | None = None) -> Answer:
        """Return sup |1 / (1 + L)|."""
        return self._of_stable(lambda: self._sensitivity(over))

    def _sensitivity(self, over: Range | None) -> Answer:
        start = fmpq(0) if self._at_one is None else 1 / (1 + self._at_one) ** 2
        end = Answer.of_exact(0) if self._pole_at_end else _squared(lambda bits: 1 / (1 + self._at_end(bits + 8)))
        return self._supremum("sensitive", _sensitive, (_below, _sum), Answer.of_exact(start), end, over)

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
        end = None if self._pole_at_end else _squared(self._at_end)
        return _told(lambda: self._supremum("still", _still, (_above, _below), start, end, over))

    def _supremum(
        self,
        name: str,
        pick: Pick,
        of: tuple[Pick, Pick],
        start: Answer | None,
        end: Answer | None,
        over: Range | None,
    ) -> Answer:
        """Return the root of the greatest of a quotient over a range."""
        places: list[_Place] = list(self._roots(name, pick, over))
        if over is not None:
            places += [Tangent(f * self._scale.period / 2) for f in over if f > 0 and not self._scale.beyond(f)]
        found = [Candidate(self._axis.ratio(place, *of), {"frequency": self._frequency(place)}) for place in places]
        if start is not None and self._has_start(over):
            found.insert(0, Candidate(start, {"frequency": Answer.of_exact(0)}))
        if end is not None and self._has_end(over):
            found.append(Candidate(end, {"frequency": self._end}))
        best = greatest(found)
        if best is None:
            return Answer.nothing(BEYOND)
        return Candidate(root_of(best.value), best.at).answer

    # --- frequencies --------------------------------------------------------------------------------------

    def crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with |L| = 1 (rad/s)."""
        none = "the gain of the open loop is one at no frequency"
        return _told(lambda: _first(self._gain_crossings(over), none))

    def phase_crossover_frequency(self, over: Range | None = None) -> Answer:
        """Return the first frequency with L on the negative real axis (rad/s)."""
        none = "the open loop is real and negative at no frequency"
        return _told(lambda: _first(self._phase_crossings(over), none))

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L| at a frequency."""
        if self._scale.beyond(frequency):
            return Answer.nothing(BEYOND)
        if frequency == 0:
            if self._at_one is None:
                return Answer.nothing("the gain is infinite at zero frequency", infinite=True)
            return Answer.of_exact(abs(self._at_one))
        return root_of(self._axis.ratio(Tangent(frequency * self._scale.period / 2), _above, _below))

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L at a frequency, followed from zero frequency (rad)."""
        return phase_at(self._axis, self._transfer, self._slow, self._scale, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency."""
        return Answer.undecided("a mask over the frequencies of a sampled loop is not answered by this version")


def delay_stood(late: Callable[[], Answer] | None, over: Range | None, *, stable: bool) -> Answer:
    """Return the dead time that a sampled loop stands; late: how it is found, None where no loop passes here."""
    if not stable:
        return Answer.nothing(UNSTABLE)
    if over is not None:
        return Answer.undecided("the dead time that a sampled loop stands belongs to no frequency: ask without a range")
    return Answer.nothing(margins.NOT_USED_UP, infinite=True) if late is None else late()


def _told(ask: Callable[[], Answer]) -> Answer:
    """Ask, and leave the question open where something on the way is not told."""
    try:
        return ask()
    except Untold as untold:
        return Answer.undecided(str(untold))


def _first(crossings: Iterable[GainCrossing | PhaseCrossing], none: str) -> Answer:
    found = least(Candidate(one.frequency, {}) for one in crossings)
    return Answer.nothing(none) if found is None else replace(found.value, at=None)


def _squared(of: Callable[[int], arb]) -> Answer:
    def refine(bits: int) -> arb:
        value = of(bits + 8)
        with working_precision(bits + 8):
            return value * value

    return Answer(Proof.ENCLOSED, refine=refine)


def _pi(bits: int) -> arb:
    with working_precision(bits):
        return arb.pi()


def _above(balls: Balls) -> arb_poly:
    return balls.above


def _below(balls: Balls) -> arb_poly:
    return balls.below


def _sum(balls: Balls) -> arb_poly:
    return balls.sum


def _real(balls: Balls) -> arb_poly:
    return balls.real


def _imaginary(balls: Balls) -> arb_poly:
    return balls.imaginary


def _excess(balls: Balls) -> arb_poly:
    return balls.excess


def _still(balls: Balls) -> arb_poly:
    return balls.still


def _sensitive(balls: Balls) -> arb_poly:
    return balls.sensitive
