"""Loops to ask."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import pytest
from flint import fmpq

from specgate.frequency.rational_loop import RationalLoop
from specgate.systems.polynomials import highest_first
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

Coefficients = Sequence[fmpq | int]


def rational(text: str) -> fmpq:
    """Return a decimal or fraction exactly."""
    from fractions import Fraction

    value = Fraction(text)
    return fmpq(value.numerator, value.denominator)


def loop_of(numerator: Coefficients, denominator: Coefficients) -> RationalLoop:
    """Return a loop under negative unity feedback (coefficients highest power first)."""
    above, below = highest_first(numerator), highest_first(denominator)
    return RationalLoop(TransferFunction(above, below), is_hurwitz(above + below))


@pytest.fixture
def loop() -> Callable[[Coefficients, Coefficients], RationalLoop]:
    return loop_of
