"""Turning points at rational times, which fall on nodes of the grid, and jumps that tie with the final value.

A repeated real pole makes them: y' of such a response is a polynomial times one exponential, so y turns where the
polynomial is zero. The closed forms below are solved by hand.
"""

from __future__ import annotations

from fractions import Fraction

import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.response.extremes import Extreme
from specgate.response.step import StepResponse


def response(numerator: list[int], denominator: list[int]) -> StepResponse:
    """Make a unit step response; coefficients lowest power first."""
    return StepResponse(fmpq_poly(numerator), fmpq_poly(denominator), fmpq(1))


def assert_taken(extreme: Extreme, value: arb, time: Fraction) -> None:
    assert extreme.value.enclose(80).overlaps(value)
    assert extreme.value.enclose(80).rad() < 1e-18
    at = extreme.time.enclose(80)
    assert at.overlaps(arb(fmpq(time.numerator, time.denominator)))
    assert at.rad() < 1e-18


def exp(exponent: Fraction) -> arb:
    return arb(fmpq(exponent.numerator, exponent.denominator)).exp()


# y(t) = 1 + ((b - 1) t - 1) e^-t for (b s + 1)/(s + 1)^2 turns at b/(b - 1), with y = 1 + (b - 1) e^(-b/(b-1)).
@pytest.mark.parametrize("b", [2, 3, 5, 9])
def test_a_lead_on_a_double_pole(b: int) -> None:
    time = Fraction(b, b - 1)
    assert_taken(response([1, b], [1, 2, 1]).greatest(), 1 + (b - 1) * exp(-time), time)


def test_a_zero_on_the_right() -> None:
    # y = 1 + (-2 t - 1) ... : (1 - s)/(s + 1)^2 gives y = 1 - (1 + 2 t) e^-t, least at t = 1/2.
    assert_taken(response([1, -1], [1, 2, 1]).least(), 1 - 2 * exp(Fraction(-1, 2)), Fraction(1, 2))


# s/(s + a)^2 gives t e^(-a t), greatest at 1/a.
@pytest.mark.parametrize("a", [1, 2, 3, 5, 8])
def test_a_pulse(a: int) -> None:
    found = response([0, 1], [a * a, 2 * a, 1])
    for extreme in (found.greatest(), found.peak_deviation()):
        assert_taken(extreme, exp(Fraction(-1)) / a, Fraction(1, a))
    assert found.least().value.exact == 0
    assert found.least().time.exact == 0


# s/(s + 1)^(n + 1) gives t^n e^-t / n!, greatest at n.
@pytest.mark.parametrize("n", [2, 3, 4, 6])
def test_a_smooth_pulse(n: int) -> None:
    factorial = 1
    for k in range(2, n + 1):
        factorial *= k
    denominator = fmpq_poly([1, 1]) ** (n + 1)
    found = StepResponse(fmpq_poly([0, 1]), denominator, fmpq(1)).greatest()
    assert_taken(found, arb(n) ** n * exp(Fraction(-n)) / factorial, Fraction(n))


def test_a_touch_of_the_level_is_never_called_a_miss() -> None:
    # y = 1 - (t - 2)^2 e^-t touches 1 at t = 2 and only approaches it afterwards.
    numerator = fmpq_poly([1, 3, 3, 1]) - fmpq_poly([0, 1]) * (4 * fmpq_poly([1, 2, 1]) - 4 * fmpq_poly([1, 1]) + 2)
    found = StepResponse(numerator, fmpq_poly([1, 3, 3, 1]), fmpq(1))
    arrival = found.first_arrival(fmpq(1))
    assert arrival.absent is None or not arrival.absent.proved
    assert found.greatest().time.enclose(64).overlaps(arb(2))


def test_a_jump_to_the_greatest_value_takes_it_at_once() -> None:
    found = response([2, 2, 1], [2, 3, 1])  # y = 1 - 2 e^-t + 2 e^-2t: from 1 down and back to 1
    assert found.greatest().value.exact == 1
    assert found.greatest().time.exact == 0
