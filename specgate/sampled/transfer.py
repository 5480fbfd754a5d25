"""Transfer functions in z whose coefficients are rational or enclosed, with what is known exactly kept apart."""

from __future__ import annotations

from collections.abc import Callable

from flint import arb_poly, fmpq_poly

from specgate.sampled.circle import in_w, in_w_balls
from specgate.terms.precision import working_precision
from specgate.terms.records import record

Parts = tuple[arb_poly, arb_poly]
"""Numerator and denominator."""


@record
class PulseTransfer:
    """numerator * N(z) / (denominator * D(z)), N and D known in balls by `rest`, both 1 where it is None.

    The exact factors hold what may lie on the unit circle for a reason (integrators, zeros of a controller), so that
    N and D have no zero there but by chance.
    """

    numerator: fmpq_poly
    denominator: fmpq_poly
    rest: Callable[[int], Parts] | None = None

    @property
    def zero(self) -> bool:
        """Whether it is zero: nothing comes back."""
        return not self.numerator

    def in_z(self, bits: int) -> Parts:
        """Return numerator and denominator in balls."""
        with working_precision(bits):
            above, below = arb_poly(self.numerator), arb_poly(self.denominator)
            if self.rest is None:
                return above, below
            first, second = self.rest(bits)
            return above * first, below * second

    def exact_in_w(self) -> tuple[fmpq_poly, fmpq_poly]:
        """Return numerator and denominator in w, z = (1 + w)/(1 - w), where all is exact."""
        return _padded(in_w(self.numerator), in_w(self.denominator), self._excess(0))

    def in_w(self, bits: int) -> Parts:
        """Return numerator and denominator in w in balls; zeros at w = 0 and at infinity stay exact."""
        if self.rest is None:
            above, below = self.exact_in_w()
            with working_precision(bits):
                return arb_poly(above), arb_poly(below)
        first, second = self.rest(bits)
        upper, lower = _padded(
            in_w(self.numerator), in_w(self.denominator), self._excess(second.degree() - first.degree())
        )
        with working_precision(bits):
            return arb_poly(upper) * in_w_balls(first, bits), arb_poly(lower) * in_w_balls(second, bits)

    def _excess(self, of_rest: int) -> int:
        return self.denominator.degree() - self.numerator.degree() + of_rest


def _padded(above: fmpq_poly, below: fmpq_poly, excess: int) -> tuple[fmpq_poly, fmpq_poly]:
    """Bring both to one power of (1 - w)."""
    factor = fmpq_poly([1, -1])
    return (above * factor**excess, below) if excess >= 0 else (above, below * factor**-excess)


def divided(p: arb_poly, exact: fmpq_poly, bits: int) -> arb_poly:
    """Return p / exact for a polynomial in balls that the exact one is known to divide: the remainder is zero."""
    if exact.degree() == 0:
        with working_precision(bits):
            return p * arb_poly([1 / exact[0]])
    with working_precision(bits):
        rest, below = p.coeffs(), [arb_poly([c])[0] for c in exact.coeffs()]
        top = len(below) - 1
        quotient = []
        for k in range(len(rest) - 1, top - 1, -1):
            factor = rest[k] / below[top]
            quotient.append(factor)
            for j in range(top):
                rest[k - top + j] -= factor * below[j]
        return arb_poly(list(reversed(quotient)))
