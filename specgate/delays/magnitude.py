"""The magnitude of a quotient of quasi-polynomials over frequency: its supremum, proved without a grid.

Its square is searched like a response: one that settles (`squared_gain`), or one that swings for ever (`echoes`).
"""

from __future__ import annotations

from functools import cached_property

from flint import acb, arb, fmpq

from specgate.delays.echoes import EchoingGain
from specgate.delays.laurent import of_quasi
from specgate.delays.recording import AXIS, PEAK
from specgate.delays.squared_gain import OSCILLATES, SquaredGain
from specgate.frequency.questions import Range
from specgate.frequency.recording import SQUARE
from specgate.frequency.values import root_of
from specgate.response.accounts import Account
from specgate.response.answers import Answer, Fragile
from specgate.response.budget import OutOfWork
from specgate.response.extremes import EQUAL_BITS, Extreme, joined
from specgate.response.modes import dyadic
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.piecewise.climbing import Ceiling, tallest
from specgate.response.piecewise.heights import SLACK, as_extreme
from specgate.response.piecewise.patches import LOOK, Ground
from specgate.systems.quasi import Quasi
from specgate.terms.precision import series_terms, working_precision

UNBOUNDED = "the gain grows without bound"
_COMES_BACK = "the gain comes back near its greatest value at ever higher frequencies, as loops with such dead times do"


class DelayedMagnitude:
    """|N/D| over frequency."""

    def __init__(self, numerator: Quasi, denominator: Quasi) -> None:
        self._above, self._below = numerator, denominator

    @cached_property
    def _pieces(self) -> SquaredGain:
        degree = self._below.undelayed.degree()
        swings = any(p.degree() >= degree for part in (self._above, self._below) for _, p in part.delayed)
        return EchoingGain(self._above, self._below) if swings else SquaredGain(self._above, self._below)

    @cached_property
    def _whole(self) -> Extreme:
        found = PiecewiseResponse(self._pieces).greatest()
        if isinstance(self._pieces, EchoingGain) and found.value.absent is not None:
            return self._bounded(self._pieces)
        return found

    def _bounded(self, pieces: EchoingGain) -> Extreme:
        """Return the greatest value to the width that a search up to some frequency and a bound beyond it leave."""
        height, most = pieces.bound()
        floor = pieces.reach(1)(LOOK)
        ceiling = Ceiling(Ground(pieces), 0, 1, floor.lower(), dyadic(SLACK))
        ceiling.over(fmpq(0), height)
        with working_precision(LOOK):
            for peak in ceiling.found:
                most = most.max(peak.height(LOOK).upper())
            most = most.max(ceiling.best + arb(dyadic(SLACK)))
            if not most.is_finite():
                return Extreme.undecided(OSCILLATES)
            value = ceiling.best.union(most)
        place = Answer.undecided("at which frequency the gain is greatest, or whether it only comes near, is not told")
        return Extreme(Answer.of_ball(lambda _: value, Fragile(_COMES_BACK)), place)

    def supremum(self, over: Range | None = None) -> Answer:
        """Return the least upper bound over a range, with the frequency where it is reached or approached."""
        if not self._above:
            return Answer.of_exact(0)
        at_zero = self._above.first_at_origin()[0] - self._below.first_at_origin()[0]
        if at_zero < 0 and (over is None or over[0] == 0):
            return Answer.nothing(UNBOUNDED, infinite=True)
        try:
            found = self._whole if over is None else self._over(over)
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)
        value, time = found.value, found.time
        if value.absent is not None:
            return value
        if time.absent is not None and time.absent.proved:
            time = Answer.nothing("approached at infinite frequency", infinite=True)
        root = root_of(value)
        peak = Answer(root.proof, exact=root.exact, refine=root.refine, fragile=value.fragile, at={"frequency": time})
        return peak.accounted(lambda: Account(PEAK, AXIS))

    def _over(self, over: Range) -> Extreme:
        low, high = over
        ground = Ground(self._pieces)
        ceiling = Ceiling(ground, 0, 1, arb(0), dyadic(SLACK))
        ceiling.over(low, high)
        peaks = tallest(ceiling.found, arb(0), ceiling.best, EQUAL_BITS)
        if ceiling.blurred or not peaks:
            raise OutOfWork("where the gain is greatest was not told")
        return joined([as_extreme(peak) for peak in peaks])

    def at(self, frequency: fmpq) -> Answer:
        """Return the magnitude at a frequency (rad/s)."""

        def refine(bits: int) -> arb:
            with working_precision(bits + 32), series_terms(1):
                point = acb(0, arb(frequency))
                return abs(of_quasi(self._above, point)[0]) / abs(of_quasi(self._below, point)[0])

        if not self._above:
            return Answer.of_exact(0)
        if frequency == 0:
            order = self._above.first_at_origin()[0] - self._below.first_at_origin()[0]
            if order < 0:
                return Answer.nothing("a pole lies on the imaginary axis at this frequency", infinite=True)
            if order > 0:
                return Answer.of_exact(0)
            return Answer.of_exact(abs(self._above.first_at_origin()[1] / self._below.first_at_origin()[1]))
        if not refine(512).is_finite():
            return Answer.undecided("a pole lies on the imaginary axis at this frequency, or very near to it")
        return Answer.of_ball(refine).accounted(lambda: Account(SQUARE, AXIS))
