"""The integral of the square of an impulse response, exactly."""

from __future__ import annotations

from flint import fmpq, fmpq_poly

from specgate.systems.polynomials import exact_quotient
from specgate.systems.stability import is_hurwitz


def energy(numerator: fmpq_poly, denominator: fmpq_poly) -> fmpq:
    """Return the integral of y^2 over t > 0, for Y = numerator / denominator strictly proper with decaying poles.

    With B* = B(-s): A and A* have no common root, so B B* = A P* + A* P with one P of lower degree than A. Then
    Y Y* = P/A + P*/A*, and by Parseval's theorem the integral is that of Y Y* along the axis over 2 pi: the value just
    after t = 0 of the function that P/A transforms, the ratio of the leading coefficients. Raises ValueError for
    another kind of Y. (The same number as from Lyapunov's equation; G. C. Newton, L. A. Gould, J. F. Kaiser,
    Analytical Design of Linear Feedback Controls, 1957, appendix E, tabulates it.)
    """
    if not numerator:
        return fmpq(0)
    divisor = numerator.gcd(denominator)
    top, bottom = exact_quotient(numerator, divisor), exact_quotient(denominator, divisor)
    if top.degree() >= bottom.degree() or not is_hurwitz(bottom):
        raise ValueError("the square of the impulse response has no finite integral")
    mirrored = _mirrored(bottom)
    unit, _, inverse = bottom.xgcd(mirrored)
    part = (top * _mirrored(top) * inverse / unit.leading_coefficient()) % bottom
    value: fmpq = part[bottom.degree() - 1] / bottom.leading_coefficient()
    return value


def _mirrored(p: fmpq_poly) -> fmpq_poly:
    """Return p(-s)."""
    return p(fmpq_poly([0, -1]))
