"""Systems and helpers that the tests of responses share."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction

import pytest
from flint import fmpq, fmpq_poly

from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first

Numbers = Sequence[str | int]
Make = Callable[..., StepResponse]


def exact(text: str | int) -> fmpq:
    """Return a decimal or a fraction exactly."""
    fraction = Fraction(text)
    return fmpq(fraction.numerator, fraction.denominator)


def polynomial(coefficients: Numbers) -> fmpq_poly:
    """Return a polynomial, highest power first."""
    return highest_first([exact(c) for c in coefficients])


@pytest.fixture(scope="session")
def respond() -> Make:
    """Make a response from coefficients, highest power first."""

    def make(numerator: Numbers, denominator: Numbers, size: str | int = 1) -> StepResponse:
        return StepResponse(polynomial(numerator), polynomial(denominator), exact(size))

    return make


@pytest.fixture(scope="session")
def rational() -> Callable[[str | int], fmpq]:
    """Read a decimal or a fraction exactly."""
    return exact
