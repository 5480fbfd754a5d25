"""The square of the magnitude of a quotient of quasi-polynomials over frequency, in the shape of a response.

The square g of |N/D| is analytic on [0, infinity) and tends to c^2, c the ratio of the leading coefficients. With
G = N - c D, of lower degree than D, and d = |G/D|, it differs from c^2 by at most d (2 c + d) (the triangle inequality
for |N| and c |D|), which falls as the frequency rises. So g can be searched like a response that settles, with
frequency in the place of time.
"""

from __future__ import annotations

from flint import acb, acb_series, arb, arb_series, fmpq

from specgate.delays.laurent import of_quasi
from specgate.response.answers import Absent
from specgate.response.budget import OutOfWork
from specgate.response.pieces import Pieces
from specgate.systems.quasi import Quasi
from specgate.systems.roots import certified_roots
from specgate.terms.precision import series_terms, working_precision

OSCILLATES = "the gain tends to no value at high frequency: a dead time passes what is not delayed as well"
_BITS = 64


class SquaredGain(Pieces):
    """|N/D|^2 over frequency; D has no root on the axis, its undelayed term is of the highest degree and alone so.

    Raises OutOfWork where it tends to no value.
    """

    def __init__(self, numerator: Quasi, denominator: Quasi) -> None:
        self._above, self._below = numerator, denominator
        base, degree = denominator.undelayed, denominator.undelayed.degree()
        if any(p.degree() >= degree for part in (numerator, denominator) for _, p in part.delayed):
            raise OutOfWork(OSCILLATES)
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
        below = 2 * abs(arb(self._below.undelayed[degree])) - size_from(self._below, height, degree)
        if not below > 0:
            return False
        gap = size_from(self._rest, height, degree) / below
        return bool(gap * (2 * abs(self._ratio) + gap) < arb(distance))

    def speed(self, index: int) -> float:
        """Return a hint of the lowest frequency at which anything happens."""
        base = self._below.undelayed
        sizes = [abs(root.value).mid() for root in certified_roots(base, _BITS) if not root.value.is_zero()]
        delays = [float(arb(delay).mid()) for part in (self._above, self._below) for delay, _ in part.delayed]
        return max([8.0 / float(size) for size in sizes] + [2.0 * delay for delay in delays], default=1.0)


def _square(series: acb_series) -> arb_series:
    """Return |f(j (w + x))|^2 from the series of f at j w."""
    turned = [coefficient * acb(0, 1) ** power for power, coefficient in enumerate(series.coeffs())]
    real, imaginary = arb_series([c.real for c in turned]), arb_series([c.imag for c in turned])
    return real * real + imaginary * imaginary


def size_from(quasi: Quasi, height: fmpq, degree: int) -> arb:
    """Return what |quasi(j w)| / w^degree does not exceed for w of at least `height`."""
    total = arb(0)
    for _, polynomial in quasi.terms:
        for power, coefficient in enumerate(polynomial.coeffs()):
            total += abs(arb(coefficient)) * arb(height) ** (power - degree)
    return total
