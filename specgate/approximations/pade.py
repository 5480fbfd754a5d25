"""Pade approximants of a dead time: the rational functions that agree with e^(-x) best at x = 0."""

from __future__ import annotations

from math import comb, factorial

from flint import acb, arb, fmpq, fmpq_poly

from specgate.systems.roots import certified_roots
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

_GUARD = 32


def approximant(above: int, below: int) -> TransferFunction:
    """Return the approximant of e^(-x) with these degrees of numerator and denominator, 1 at x = 0."""
    return TransferFunction(_polynomial(above, below, -1), _polynomial(below, above, 1))


def of_dead_time(order: int, dead_time: fmpq) -> TransferFunction:
    """Return the approximant of e^(-dead_time s) of equal degrees, whose magnitude is one on the axis."""
    found, scaled = approximant(order, order), fmpq_poly([0, dead_time])
    return TransferFunction(found.numerator(scaled), found.denominator(scaled))


def phase_error(order: int, angle: arb, bits: int) -> arb:
    """Return by how much the approximant of equal degrees lags less than e^(-jx) at x = `angle`, rad.

    Its own lag is twice the phase of its denominator, followed from zero: all roots of that lie to the left (Ehle
    1973), so that each real one and each pair adds an angle that stays between 0 and pi.
    """
    denominator = approximant(order, order).denominator
    roots = [root.value for root in certified_roots(denominator, bits + _GUARD) if not root.value.imag < 0]
    with working_precision(bits + _GUARD):
        lag = sum((_turn(root, angle) for root in roots), arb(0))
        return angle - 2 * lag


def _turn(root: acb, angle: arb) -> arb:
    """Return the phase that a root, with its conjugate where it has one, adds at j*angle."""
    if root.imag.is_zero():
        return (-angle / root.real).atan()
    square = root.real * root.real + root.imag * root.imag
    return acb(square - angle * angle, -2 * root.real * angle).arg()


def _polynomial(degree: int, other: int, sign: int) -> fmpq_poly:
    """Return sum of (m + n - k)! m! / ((m + n)! k! (m - k)!) (sign x)^k."""
    total = factorial(degree + other)
    return fmpq_poly(
        [fmpq(sign**k * comb(degree, k) * factorial(degree + other - k), total) for k in range(degree + 1)]
    )
