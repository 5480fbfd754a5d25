"""Responses given by their poles and zeros, exact."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from typing import Any

import pytest
from flint import fmpq, fmpq_poly

from specgate.approximations.features import Features
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent
from specgate.response.step import StepResponse
from specgate.systems.transfer import TransferFunction

Root = float | str | tuple[float | str, float | str]
"""A real root, or (real part, imaginary part) of a conjugate pair."""


def exact(number: float | str | fmpq | Fraction) -> fmpq:
    """Return a decimal as it is written."""
    if isinstance(number, fmpq):
        return number
    value = Fraction(str(number))
    return fmpq(value.numerator, value.denominator)


def monic(roots: Sequence[Root]) -> fmpq_poly:
    """Return the polynomial with these roots, 1 at the origin wherever it does not vanish there."""
    result = fmpq_poly([1])
    for root in roots:
        if isinstance(root, tuple):
            real, imaginary = exact(root[0]), exact(root[1])
            result *= fmpq_poly([real * real + imaginary * imaginary, -2 * real, 1])
        else:
            result *= fmpq_poly([-exact(root), 1])
    return result / result[0] if result[0] != 0 else result


def pair(damping: float | str | fmpq, frequency: float | str | fmpq = 1) -> fmpq_poly:
    """Return s^2/wn^2 + 2 zeta s/wn + 1."""
    wn = exact(frequency)
    return fmpq_poly([1, 2 * exact(damping) / wn, 1 / wn**2])


def of_polynomials(numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq | int = 1, **more: Any) -> Features:
    """Return the features of a step response; the error is measured from the input."""
    height = fmpq(size)
    response = StepResponse(numerator, denominator, height)
    return Features(
        ResponseSubject(
            channel=TransferFunction(numerator, denominator),
            size=height,
            response=response,
            error=StepResponse(denominator - numerator, denominator, height),
            void=more.get("void"),
        )
    )


class Builder:
    """Makes features from poles and zeros."""

    def pair(
        self, damping: float | str | fmpq, poles: Sequence[Root] = (), zeros: Sequence[Root] = (), size: fmpq | int = 1
    ) -> Features:
        """Return a pair of natural frequency 1 with other poles and zeros, gain 1."""
        return of_polynomials(monic(zeros), pair(damping) * monic(poles), size)

    def roots(self, poles: Sequence[Root], zeros: Sequence[Root] = (), size: fmpq | int = 1, **more: Any) -> Features:
        """Return the response with these poles and zeros, gain 1."""
        return of_polynomials(monic(zeros), monic(poles), size, **more)

    def ratio(
        self, numerator: Sequence[Any], denominator: Sequence[Any], size: fmpq | int = 1, **more: Any
    ) -> Features:
        """Return the response with these coefficients, highest power first."""
        above = fmpq_poly([exact(c) for c in reversed(numerator)])
        return of_polynomials(above, fmpq_poly([exact(c) for c in reversed(denominator)]), size, **more)


@pytest.fixture(scope="session")
def build() -> Builder:
    return Builder()


@pytest.fixture
def hidden() -> Absent:
    return Absent("an unstable mode is hidden between input and signal")
