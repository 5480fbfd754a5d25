"""A quotient L = N/D of quasi-polynomials on the imaginary axis, in balls of frequencies."""

from __future__ import annotations

from functools import cached_property, lru_cache
from typing import Literal

from flint import acb, acb_series, arb, ctx, fmpq, fmpq_poly

from specgate.delays.isolate import Function
from specgate.delays.laurent import of_quasi
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import Evaluated, exceeding_beyond
from specgate.terms.precision import series_terms, working_precision


class DelayedAxis:
    """N/D as a function of frequency (rad/s, not negative); N and D without a common factor."""

    def __init__(self, transfer: DelayedTransfer) -> None:
        self.numerator, self.denominator = transfer.numerator, transfer.denominator
        self._at = lru_cache(maxsize=8)(self._evaluated)

    def _evaluated(self, bits: int) -> tuple[Evaluated, Evaluated]:
        with working_precision(bits):
            return Evaluated(self.numerator), Evaluated(self.denominator)

    def parts(self, frequency: arb, bits: int) -> tuple[acb, acb]:
        """Return balls of N and D, at the precision that is set."""
        above, below = self._at(bits)
        s = acb(0, frequency)
        return above.value(s), below.value(s)

    def ratio(self, frequency: arb, bits: int) -> acb:
        """Return a ball of L, at the precision that is set."""
        above, below = self.parts(frequency, bits)
        return above / below

    @property
    def imaginary(self) -> Function:
        """Im(N conj D) with its slope over frequency."""

        def function(frequency: arb) -> tuple[arb, arb]:
            n, d, dn, dd = self.with_slopes(frequency)
            return (n * d.conjugate()).imag, (dn * d.conjugate() - n * dd.conjugate()).real

        return function

    @property
    def excess(self) -> Function:
        """|N|^2 - |D|^2 with its slope over frequency."""

        def function(frequency: arb) -> tuple[arb, arb]:
            n, d, dn, dd = self.with_slopes(frequency)
            value = (n * n.conjugate()).real - (d * d.conjugate()).real
            return value, 2 * ((dd * d.conjugate()).imag - (dn * n.conjugate()).imag)

        return function

    def with_slopes(self, frequency: arb) -> tuple[acb, acb, acb, acb]:
        """Return balls of N, D, N' and D' at the precision that is set."""
        above, below = self._at(ctx.prec)
        s = acb(0, frequency)
        return above.value(s), below.value(s), above.slope(s), below.slope(s)

    def turning(self, kind: Literal["imaginary", "excess"]) -> Function:
        """Return the slope of one of these over frequency, with its own slope."""

        def function(frequency: arb) -> tuple[arb, arb]:
            _, slope, bend = self.series(kind, frequency)
            return slope, 2 * bend

        return function

    def series(self, kind: Literal["imaginary", "excess"], frequency: arb) -> tuple[arb, arb, arb]:
        """Return the first three coefficients of the series of one of these about a frequency (a ball of them)."""
        with series_terms(3):
            n, d = (_along(of_quasi(part, acb(0, frequency))) for part in (self.numerator, self.denominator))
            if kind == "imaginary":
                total = [one.imag for one in _times_conjugate(n, d)]
            else:
                above, below = _times_conjugate(n, n), _times_conjugate(d, d)
                total = [one.real - other.real for one, other in zip(above, below, strict=True)]
        return total[0], total[1], total[2]

    # --- ends of the axis -------------------------------------------------------------------------------------

    @cached_property
    def at_zero(self) -> fmpq | None:
        """L at zero frequency; None where it is infinite. Raises ValueError for L = 0."""
        above, below = self.numerator.first_at_origin(), self.denominator.first_at_origin()
        if below[0] > above[0]:
            return None
        return fmpq(0) if above[0] > below[0] else above[1] / below[1]

    def below_one_beyond(self, factor: fmpq) -> fmpq | None:
        """Return a frequency from which on factor |L| < 1 for good; None: there is none, or none was found."""
        terms = [*self.denominator.delayed, *((delay, p * factor) for delay, p in self.numerator.terms)]
        return exceeding_beyond(self.denominator.undelayed, terms, fmpq(0))

    def start_of(self, product: Quasi, *, odd: bool) -> fmpq:
        """Return a frequency up to which the odd (even) part of product(j w) vanishes at w = 0 alone.

        product: real on the real axis, so that j^k c_k w^k are the terms of its series: odd ones imaginary, even ones
        real. With q the first such power that is there, f = w^q f^(q)(x)/q! for some x in (0, w) (Taylor), and the
        coefficient over a ball of points holds f^(q)(x)/q!.
        """
        powers = [k for k, c in enumerate(product.at_origin(_MOST_POWERS)) if c != 0 and k % 2 == int(odd)]
        if not powers:
            return fmpq(0)
        first, reach = powers[0], fmpq(1)
        with series_terms(first + 1), working_precision(96):
            for _ in range(200):
                coefficient = of_quasi(product, acb(0, arb(0).union(arb(reach))))[first]
                turned = coefficient * acb(0, 1) ** first
                part = turned.imag if odd else turned.real
                if not part.contains(0):
                    return reach
                reach = reach / 2
        return fmpq(0)


_MOST_POWERS = 40


def _along(series: acb_series) -> list[acb]:
    """Return three coefficients in the frequency of a series in s."""
    return [series[power] * acb(0, 1) ** power for power in range(3)]


def _times_conjugate(one: list[acb], other: list[acb]) -> list[acb]:
    return [sum((one[i] * other[k - i].conjugate() for i in range(k + 1)), acb(0)) for k in range(3)]


def mirrored(quasi: Quasi) -> Quasi:
    """Return the quasi-polynomial at -s (its delays are negative)."""
    return Quasi.of({-delay: p(fmpq_poly([0, -1])) for delay, p in quasi.terms})
