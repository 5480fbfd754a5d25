"""Subjects to read measures from."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

import pytest
from flint import fmpq

from specgate.measures.measure import Arguments
from specgate.measures.subjects import ResponseSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

Coefficients = Sequence[fmpq | int]


def subject_of(
    numerator: Coefficients, denominator: Coefficients, size: fmpq | int = 1, **more: Any
) -> ResponseSubject:
    """Return a response whose error is measured from the input (coefficients highest power first)."""
    above, below, height = highest_first(numerator), highest_first(denominator), fmpq(size)
    return ResponseSubject(
        channel=TransferFunction(above, below),
        size=height,
        response=more.get("response", StepResponse(above, below, height)),
        error=more.get("error", StepResponse(below - above, below, height)),
        void=more.get("void"),
    )


@pytest.fixture
def subject() -> Callable[..., ResponseSubject]:
    return subject_of


@pytest.fixture
def read() -> Callable[..., Answer]:
    def reader(name: str, subject: Any, **arguments: Any) -> Answer:
        of = MEASURES[name].read
        assert of is not None
        return of(subject, Arguments(**arguments))

    return reader


@pytest.fixture
def unstable() -> Absent:
    return Absent("an unstable mode is hidden between input and signal")
