"""Quasi-polynomials and loops to look at, and numbers as mpmath has them."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import mpmath
import pytest
from flint import fmpq

from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi

Coefficients = Sequence[fmpq | int]


def exact(text: str | int) -> fmpq:
    whole, _, decimals = str(text).partition(".")
    return fmpq(int(whole + decimals), 10 ** len(decimals))


def late(numerator: Coefficients, denominator: Coefficients, delay: fmpq) -> DelayedTransfer:
    """Return numerator/denominator e^(-delay s), coefficients highest power first."""
    lead = fmpq(1) / fmpq(denominator[0])
    below = Quasi.rational(highest_first(denominator) * lead)
    return DelayedTransfer(Quasi.of({delay: highest_first(numerator) * lead}), below, ((below, 1),))


def closed(open_loop: DelayedTransfer) -> DelayedTransfer:
    """Return L/(1 + L) of a loop without common factors."""
    below = open_loop.numerator + open_loop.denominator
    return DelayedTransfer(open_loop.numerator, below, ((below, 1),))


def value(quasi: Quasi, s: mpmath.mpc) -> mpmath.mpc:
    """Return a quasi-polynomial at a point, at mpmath's precision."""
    total = mpmath.mpc(0)
    for delay, p in quasi.terms:
        polynomial = mpmath.mpc(0)
        for coefficient in reversed(p.coeffs()):
            polynomial = polynomial * s + _number(coefficient)
        total += polynomial * mpmath.exp(-s * _number(delay))
    return total


def _number(c: fmpq) -> mpmath.mpf:
    return mpmath.mpf(int(c.p)) / int(c.q)


@pytest.fixture
def at() -> Callable[[Quasi, mpmath.mpc], mpmath.mpc]:
    return value
