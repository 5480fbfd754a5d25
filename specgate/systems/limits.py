"""First and last value of a rational response to a step, exact."""

from __future__ import annotations

from flint import fmpq

from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction


def initial_value(channel: TransferFunction, size: fmpq) -> fmpq:
    """Return the value just after a step of `size`: size times the limit at infinity.

    Raises ValueError if the channel is improper: the response starts with an impulse.
    """
    if not channel.proper:
        raise ValueError("an improper channel has no step response")
    if channel.numerator.degree() < channel.denominator.degree():
        return fmpq(0)
    return size * channel.numerator.leading_coefficient() / channel.denominator.leading_coefficient()


def final_value(channel: TransferFunction, size: fmpq) -> fmpq | None:
    """Return the value a response to a step of `size` settles to, None if it settles to none.

    It exists if and only if every pole that is left after exact cancellation lies strictly left of the axis
    (the limit theorem alone would give a number for an unstable channel too), or the channel is zero.
    """
    reduced = channel.reduced()
    if not is_hurwitz(reduced.denominator):
        return None
    return size * reduced.numerator[0] / reduced.denominator[0]
