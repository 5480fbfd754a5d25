"""Transfer functions as pairs of exact polynomials in s."""

from __future__ import annotations

from flint import fmpq, fmpq_poly

from specgate.systems.polynomials import order_at_origin
from specgate.terms.records import record


@record
class TransferFunction:
    """numerator / denominator *as written*, never reduced behind the user's back; coherent SI."""

    numerator: fmpq_poly
    denominator: fmpq_poly

    def reduced(self) -> TransferFunction:
        """Cancel the greatest common divisor and make the denominator monic."""
        divisor = self.numerator.gcd(self.denominator)
        numerator, denominator = self.numerator // divisor, self.denominator // divisor
        lead = denominator.leading_coefficient()
        return TransferFunction(numerator / lead, denominator / lead)

    @property
    def proper(self) -> bool:
        """Whether the numerator's degree does not exceed the denominator's."""
        return self.numerator.degree() <= self.denominator.degree()

    @property
    def poles_at_origin(self) -> int:
        """The number of poles at s = 0 left after cancellation."""
        return max(0, -self.order_at_origin) if self.numerator else 0

    @property
    def zeros_at_origin(self) -> int:
        """The number of zeros at s = 0 left after cancellation. Raises ValueError for zero."""
        return max(0, self.order_at_origin)

    @property
    def order_at_origin(self) -> int:
        """Zeros minus poles at s = 0. Raises ValueError for zero."""
        return order_at_origin(self.numerator) - order_at_origin(self.denominator)

    @property
    def value_at_origin(self) -> fmpq:
        """The limit of s^-order times itself at s = 0, not zero. Raises ValueError for zero."""
        numerator, denominator = self.numerator, self.denominator
        return numerator[order_at_origin(numerator)] / denominator[order_at_origin(denominator)]

    def scaled(self, factor: fmpq) -> TransferFunction:
        """Return the same with its numerator multiplied by `factor`."""
        return TransferFunction(self.numerator * factor, self.denominator)
