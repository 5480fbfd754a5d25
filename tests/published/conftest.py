"""Responses given by their coefficients, for the tests of this room."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction

import pytest
from flint import fmpq

from specgate.approximations.features import Features
from specgate.measures.subjects import ResponseSubject
from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction


def _exact(number: float) -> fmpq:
    value = Fraction(str(number))
    return fmpq(value.numerator, value.denominator)


@pytest.fixture
def build_ratio() -> Callable[[Sequence[float], Sequence[float]], Features]:
    """Return a maker of features from coefficients, highest power first, each the decimal that it is printed as."""

    def build(numerator: Sequence[float], denominator: Sequence[float]) -> Features:
        above, below = (highest_first([_exact(c) for c in part]) for part in (numerator, denominator))
        response = StepResponse(above, below, fmpq(1))
        return Features(ResponseSubject(TransferFunction(above, below), fmpq(1), response, response))

    return build
