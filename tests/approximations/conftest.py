"""Responses given by their poles and zeros, exact."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from typing import Any

import pytest
from flint import fmpq, fmpq_poly

from specgate.approximations.approximation import Approximation
from specgate.approximations.features import Features
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.table import conditions
from specgate.approximations.viewed import Viewed
from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.measures.measure import Arguments
from specgate.measures.subjects import BreakSubject, ResponseSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Trilean

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
            gain=RationalGain(TransferFunction(numerator, denominator)),
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

    def closed(self, numerator: fmpq_poly, denominator: fmpq_poly) -> Features:
        """Return the response of unity negative feedback around L = numerator/denominator."""
        return of_polynomials(numerator, numerator + denominator)

    def opened(self, numerator: fmpq_poly, denominator: fmpq_poly) -> OpenedLoop:
        """Return L = numerator/denominator at a break of a loop that has no other modes."""
        transfer = TransferFunction(numerator, denominator)
        stable = is_hurwitz(numerator + denominator)
        return OpenedLoop("b", BreakSubject(transfer, Answer.of_truth(stable), RationalLoop(transfer, stable)))

    def loop(self, gain: float | str | fmpq, poles: Sequence[Root], zeros: Sequence[Root] = ()) -> OpenedLoop:
        """Return the opened loop with these poles and zeros; each factor but s is 1 at the origin."""
        return self.opened(exact(gain) * monic(zeros), monic(poles))


class Shown:
    """Shows a stated accuracy: errors of a row against proved values, extremes found by search."""

    def holds(self, row: Approximation, features: Viewed, arguments: Arguments) -> bool:
        """Tell whether every condition of a row is met."""
        every = conditions(row.name, arguments.measure, row.variant)
        return all(one.find(features, arguments, one.threshold).holds is Trilean.YES for _, one in every)

    def error(self, row: Approximation, features: Viewed, arguments: Arguments) -> float:
        """Return formula / proved value - 1 of a response in range; it lies inside what is stated for it."""
        assert self.holds(row, features, arguments)
        read = MEASURES[arguments.measure].read
        assert read is not None
        value, truth = row.evaluate(features, arguments).enclose(96), read(features.subject, arguments).enclose(96)
        with working_precision(96):
            error = value / truth - 1
        stated = row.accuracy(features, arguments)
        assert stated is not None
        assert not error < stated.lower - _TINY, (error, stated.text)
        assert not error > stated.upper + _TINY, (error, stated.text)
        return float(error.mid())

    def extremes(self, error: Callable[[fmpq], float], low: fmpq, high: fmpq) -> tuple[float, float]:
        """Return the least and greatest of a function on a range: a grid, then golden sections about its best point."""
        grid = [low + (high - low) * k / 40 for k in range(41)]
        values = [error(point) for point in grid]
        least = self._refined(error, grid, values)
        return least, -self._refined(lambda point: -error(point), grid, [-value for value in values])

    def _refined(self, error: Callable[[fmpq], float], grid: Sequence[fmpq], values: Sequence[float]) -> float:
        best = min(range(len(grid)), key=values.__getitem__)
        low, high = grid[max(best - 1, 0)], grid[min(best + 1, len(grid) - 1)]
        for _ in range(16):
            left, right = low + (high - low) * fmpq(382, 1000), low + (high - low) * fmpq(618, 1000)
            if error(left) < error(right):
                high = right
            else:
                low = left
        return min(values[best], error((low + high) / 2))

    def tight(self, found: tuple[float, float], low: fmpq, high: fmpq) -> None:
        """Assert that a range is used up to a tenth of its width at either end."""
        slack = float(high - low) / 10 + 1e-15
        assert found[0] <= float(low) + slack, (found, low, high)
        assert found[1] >= float(high) - slack, (found, low, high)


_TINY = fmpq(1, 10**20)
"""Width of the balls that errors are computed with."""


@pytest.fixture(scope="session")
def build() -> Builder:
    return Builder()


@pytest.fixture(scope="session")
def shown() -> Shown:
    return Shown()


@pytest.fixture
def hidden() -> Absent:
    return Absent("an unstable mode is hidden between input and signal")
