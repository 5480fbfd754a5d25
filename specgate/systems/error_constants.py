"""Type and error constants of an open loop L, exact, after cancellation."""

from __future__ import annotations

from flint import fmpq

from specgate.systems.polynomials import order_at_origin
from specgate.systems.transfer import TransferFunction


def loop_type(open_loop: TransferFunction) -> int:
    """Return the number of poles minus zeros of L at the origin; 0 where L is zero."""
    if not open_loop.numerator:
        return 0
    return order_at_origin(open_loop.denominator) - order_at_origin(open_loop.numerator)


def position_constant(open_loop: TransferFunction) -> fmpq | None:
    """Return lim L(s) at s = 0, None where it is infinite."""
    return _constant(open_loop, 0)


def velocity_constant(open_loop: TransferFunction) -> fmpq | None:
    """Return lim s L(s) at s = 0 (1/s), None where it is infinite."""
    return _constant(open_loop, 1)


def acceleration_constant(open_loop: TransferFunction) -> fmpq | None:
    """Return lim s^2 L(s) at s = 0 (1/s^2), None where it is infinite."""
    return _constant(open_loop, 2)


def sign_at_origin(open_loop: TransferFunction) -> int:
    """Return the sign of L(s) for small positive s; 0 where L is zero."""
    numerator, denominator = open_loop.numerator, open_loop.denominator
    if not numerator:
        return 0
    return 1 if numerator[order_at_origin(numerator)] / denominator[order_at_origin(denominator)] > 0 else -1


def _constant(open_loop: TransferFunction, power: int) -> fmpq | None:
    integrators = loop_type(open_loop)
    if integrators > power:
        return None
    if integrators < power or not open_loop.numerator:
        return fmpq(0)
    numerator, denominator = open_loop.numerator, open_loop.denominator
    return numerator[order_at_origin(numerator)] / denominator[order_at_origin(denominator)]
