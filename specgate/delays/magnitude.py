"""The magnitude of a quotient of quasi-polynomials over frequency: its supremum, proved without a grid.

The square g of |N/D| is analytic on [0, infinity) and tends to c^2, c the ratio of the leading coefficients. With
G = N - c D, of lower degree than D, and d = |G/D|, it differs from c^2 by at most d (2 c + d) (the triangle inequality
for |N| and c |D|), which falls as the frequency rises. So g can be searched like a response that settles, with
frequency in the place of time.
"""

from __future__ import annotations

from functools import cached_property

from flint import acb, acb_series, arb, arb_series, fmpq

from specgate.delays.laurent import of_quasi
from specgate.frequency.questions import Range
from specgate.frequency.values import root_of
from specgate.response.answers import Absent, Answer
from specgate.response.budget import OutOfWork
from specgate.response.extremes import EQUAL_BITS, Extreme, joined
from specgate.response.modes import dyadic
from specgate.response.pieces import Pieces
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.piecewise.climbing import Ceiling, tallest
from specgate.response.piecewise.heights import SLACK, as_extreme
from specgate.response.piecewise.patches import Ground
from specgate.systems.quasi import Quasi
from specgate.systems.roots import certified_roots
from specgate.terms.precision import series_terms, working_precision

UNBOUNDED = "the gain grows without bound"
_OSCILLATES = "the gain tends to no value at high frequency: a dead time passes what is not delayed as well"
_BITS = 64


class SquaredGain(Pieces):
    """|N/D|^2 over frequency; D has no root on the axis, its undelayed term is of the highest degree and alone so.

    Raises OutOfWork where it tends to no value.
    """

    def __init__(self, numerator: Quasi, denominator: Quasi) -> None:
        self._above, self._below = numerator, denominator
        base, degree = denominator.undelayed, denominator.undelayed.degree()
        if any(p.degree() >= degree for part in (numerator, denominator) for _, p in part.delayed):
            raise OutOfWork(_OSCILLATES)
        self._ratio = numerator.undelayed[degree] / base[degree] if numerator else fmpq(0)
        self._rest = numerator + denominator.scaled(-self._ratio)

    @property
    def final(self) -> fmpq | Absent:
        """The square of the gain at infinite frequency."""
        return self._ratio * self._ratio

    def kink(self, index: int) -> fmpq | None:
        """Return 0 for the only piece."""
        return fmpq(0) if index == 0 else None

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of the square and its first three derivatives over a ball of frequencies (rad/s)."""
        with working_precision(bits + 32), series_terms(4):
            point = acb(0, time)
            above, below = (_square(of_quasi(part, point)) for part in (self._above, self._below))
            if below[0].contains(0):
                nothing = arb("nan")
                return nothing, nothing, nothing, nothing
            found = above / below
            return found[0], found[1], 2 * found[2], 6 * found[3]

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a frequency from which on the square is proved to be within a distance of its limit."""
        with working_precision(_BITS):
            low, high = fmpq(0), fmpq(1, 2**20)
            for _ in range(400):
                if self._within(high, distance):
                    break
                low, high = high, 2 * high
            else:
                return None
            for _ in range(6):
                middle = (low + high) / 2
                low, high = (low, middle) if self._within(middle, distance) else (middle, high)
        return high

    def _within(self, height: fmpq, distance: fmpq) -> bool:
        degree = self._below.undelayed.degree()
        # The leading term counts once with each sign: twice it, less all terms.
        below = 2 * abs(arb(self._below.undelayed[degree])) - _size(self._below, height, degree)
        if not below > 0:
            return False
        gap = _size(self._rest, height, degree) / below
        return bool(gap * (2 * abs(self._ratio) + gap) < arb(distance))

    def speed(self, index: int) -> float:
        """Return a hint of the lowest frequency at which anything happens."""
        base = self._below.undelayed
        sizes = [abs(root.value).mid() for root in certified_roots(base, _BITS) if not root.value.is_zero()]
        delays = [float(arb(delay).mid()) for part in (self._above, self._below) for delay, _ in part.delayed]
        return max([8.0 / float(size) for size in sizes] + [2.0 * delay for delay in delays], default=1.0)


class DelayedMagnitude:
    """|N/D| over frequency."""

    def __init__(self, numerator: Quasi, denominator: Quasi) -> None:
        self._above, self._below = numerator, denominator

    @cached_property
    def _pieces(self) -> SquaredGain:
        return SquaredGain(self._above, self._below)

    @cached_property
    def _whole(self) -> Extreme:
        return PiecewiseResponse(self._pieces).greatest()

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
        return Answer(root.proof, exact=root.exact, refine=root.refine, fragile=value.fragile, at={"frequency": time})

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
        return Answer.of_ball(refine)


def _square(series: acb_series) -> arb_series:
    """Return |f(j (w + x))|^2 from the series of f at j w."""
    turned = [coefficient * acb(0, 1) ** power for power, coefficient in enumerate(series.coeffs())]
    real, imaginary = arb_series([c.real for c in turned]), arb_series([c.imag for c in turned])
    return real * real + imaginary * imaginary


def _size(quasi: Quasi, height: fmpq, degree: int) -> arb:
    """Return what |quasi(j w)| / w^degree does not exceed for w of at least `height`."""
    total = arb(0)
    for _, polynomial in quasi.terms:
        for power, coefficient in enumerate(polynomial.coeffs()):
            total += abs(arb(coefficient)) * arb(height) ** (power - degree)
    return total
