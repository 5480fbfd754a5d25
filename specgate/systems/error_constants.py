"""Type and error constants of an open loop L, exact, after cancellation."""

from __future__ import annotations

from typing import Protocol

from flint import fmpq


class Opened(Protocol):
    """What is asked of an open loop at zero frequency, whatever kind it is."""

    @property
    def numerator(self) -> object:
        """False as a truth value where L is zero."""

    @property
    def order_at_origin(self) -> int:
        """Zeros minus poles at the origin."""

    @property
    def value_at_origin(self) -> fmpq:
        """The leading coefficient at the origin."""


def loop_type(open_loop: Opened) -> int:
    """Return the number of poles minus zeros of L at the origin; 0 where L is zero. A dead time is 1 there."""
    if not open_loop.numerator:
        return 0
    return -open_loop.order_at_origin


def position_constant(open_loop: Opened) -> fmpq | None:
    """Return lim L(s) at s = 0, None where it is infinite."""
    return _constant(open_loop, 0)


def velocity_constant(open_loop: Opened) -> fmpq | None:
    """Return lim s L(s) at s = 0 (1/s), None where it is infinite."""
    return _constant(open_loop, 1)


def acceleration_constant(open_loop: Opened) -> fmpq | None:
    """Return lim s^2 L(s) at s = 0 (1/s^2), None where it is infinite."""
    return _constant(open_loop, 2)


def sign_at_origin(open_loop: Opened) -> int:
    """Return the sign of L(s) for small positive s; 0 where L is zero."""
    if not open_loop.numerator:
        return 0
    return 1 if open_loop.value_at_origin > 0 else -1


def _constant(open_loop: Opened, power: int) -> fmpq | None:
    integrators = loop_type(open_loop)
    if integrators > power:
        return None
    if integrators < power or not open_loop.numerator:
        return fmpq(0)
    return open_loop.value_at_origin
