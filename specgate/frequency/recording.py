"""How a number over frequency was proved (see `specgate.response.accounts`)."""

from __future__ import annotations

from flint import fmpq_poly

from specgate.frequency.scale import Scale
from specgate.frequency.spots import positive_roots
from specgate.response.accounts import Account, Footing

UNIT = "all points with |L| = 1, the ends of the axis or of the range included: roots of |N|^2 - |D|^2, N/D = L"
REAL = "all points with L real and negative, the ends of the axis or of the range included: roots of Im(N conj D)"
STILL = "all points where the magnitude stands still, and the ends of the axis or of the range; the greatest of them"
FALL = "the first root with the factor of 3 dB rounded up and down, and one simple zero of the gain minus it between"
SQUARE = "the square of the magnitude, exact, and its root"
ANGLES = "the sum of the angles of certified poles and zeros, each followed from zero frequency"
SIDES = (
    "the sign of mask minus gain between neighbouring roots of the polynomials where both are one; along lines that "
    "are no polynomial all zeros isolated in balls"
)


def footing(scale: Scale) -> Footing:
    """Return what a proof of a rational loop or channel stands on."""
    exact = f"a quotient of polynomials with exact coefficients in {scale.variable}"
    return Footing(f"{exact}, of which all positive roots are isolated")


def of_roots(method: str, scale: Scale, polynomial: fmpq_poly, **counts: int | str) -> Account:
    """Return the account of a number that the roots of a polynomial tell."""
    positive = len(positive_roots(polynomial)) if polynomial else 0
    told = {"degree": polynomial.degree(), "positive roots": positive}
    return Account(method, footing(scale), counts={**told, **counts})


def of_values(method: str, scale: Scale, **counts: int | str) -> Account:
    """Return the account of a number that values at given frequencies tell."""
    return Account(method, footing(scale), counts=counts)
