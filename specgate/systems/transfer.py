"""Transfer functions as pairs of exact polynomials in s."""

from __future__ import annotations

from flint import fmpq, fmpq_poly

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

    def scaled(self, factor: fmpq) -> TransferFunction:
        """Return the same with its numerator multiplied by `factor`."""
        return TransferFunction(self.numerator * factor, self.denominator)
