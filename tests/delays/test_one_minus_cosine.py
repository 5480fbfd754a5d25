"""One minus a cosine through dead time: quadrature of Taylor series, closed forms, the undelayed response."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from flint import arb, fmpq

from specgate.delays.inputs import respond_late
from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.questions import TimeResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

from .conftest import Coefficients, late
from .series import Chain
from .test_responses import LOOPS, chain, number, rational, reference_of, response, transfer

SIZE, PERIOD = 3, Fraction(5, 2)
GROWING = (([2], [1], 0), ([1], [1, 0], 1))


def quadrature(step: Chain, time: Fraction) -> mpmath.mpf:
    """Return the integral of the slope of the input times the step response before, cut where the series are."""
    rate = 2 * mpmath.pi * PERIOD.denominator / PERIOD.numerator
    end = min(PERIOD, time)
    cuts = sorted({Fraction(0), end, *(time - Fraction(k, 10) for k in range(int(time * 10) + 1))})
    ends = [mpmath.mpf(cut.numerator) / cut.denominator for cut in cuts if 0 <= cut <= end]

    def share(since: mpmath.mpf) -> mpmath.mpf:
        sign, mantissa, exponent, _ = since._mpf_
        assert sign == 0
        return step.at(time - Fraction(int(mantissa)) * Fraction(2) ** int(exponent)) * mpmath.sin(rate * since)

    return SIZE * rate / 2 * mpmath.quad(share, ends, maxdegree=3)


def bump(channel: Coefficients, below: Coefficients, delay: Fraction) -> tuple[TimeResponse, TimeResponse]:
    """Return the response of a fraction with a dead time before it, and without."""
    given = Input("one_minus_cosine", {"size": fmpq(SIZE), "duration": rational(PERIOD)})
    found = respond_late([(late(channel, below, rational(delay)), given)])
    plain = respond([(TransferFunction(highest_first(channel), highest_first(below)), given)])
    assert not isinstance(found, Absent)
    assert not isinstance(plain, Absent)
    return found, plain


@pytest.mark.parametrize("name", ["lag with PI", "two lags, two dead times"])
def test_values_are_those_of_quadrature(name: str) -> None:
    """Before and after the end of the input, and far beyond where the rightmost poles have taken over."""
    found = response(transfer(*LOOPS[name]), "one_minus_cosine", size=SIZE, duration=rational(PERIOD))
    assert found.final_value().exact == 0
    with mpmath.workdps(34):
        for time in (Fraction(17, 10), Fraction(33, 10), Fraction(211, 10)):
            ball = found.enclose(rational(time), 100)
            assert ball.rad() < arb(2) ** -80
            assert abs(number(ball) - quadrature(reference_of(name), time)) < mpmath.mpf(10) ** -21, time


def test_a_growing_loop_is_followed() -> None:
    found = response(transfer(*GROWING), "one_minus_cosine", size=SIZE, duration=rational(PERIOD))
    assert found.settling(fmpq(1, 50)).absent is not None
    greatest = found.greatest().value.absent
    assert greatest is not None
    assert greatest.proved
    step = chain(*GROWING)
    with mpmath.workdps(34):
        for time in (Fraction(9, 4), Fraction(127, 10)):
            expected = quadrature(step, time)
            assert abs(number(found.enclose(rational(time), 100)) / expected - 1) < mpmath.mpf(10) ** -18


def test_the_peak_of_a_loop_is_one_of_the_series() -> None:
    found = response(transfer(*LOOPS["lag with PI"]), "one_minus_cosine", size=SIZE, duration=rational(PERIOD))
    step, peak = reference_of("lag with PI"), found.greatest()
    with mpmath.workdps(34):
        time = Fraction(str(number(peak.time))).limit_denominator(10**14)
        assert abs(number(peak.value) - quadrature(step, time)) < mpmath.mpf(10) ** -20
        settled = Fraction(str(number(found.settling(fmpq(1, 50))))).limit_denominator(10**16)
        assert abs(abs(quadrature(step, settled)) - mpmath.mpf(1) / 50) < mpmath.mpf(10) ** -12


@pytest.mark.parametrize("below", [[1, 1, 4], [3, 1], [1, 1, 0]])
def test_dead_time_outside_every_loop_only_shifts(below: Coefficients) -> None:
    """No swing is left after the end; an integrator keeps the area of the input, exactly."""
    found, plain = bump([1, 2][-(len(below) - 1) :], below, Fraction(5, 7))
    assert found.final_value().exact == plain.final_value().exact
    late_one, one = found.settling(fmpq(1, 10**9)), plain.settling(fmpq(1, 10**9))
    assert abs(number(late_one) - number(one) - mpmath.mpf(5) / 7) < mpmath.mpf(10) ** -12
    assert abs(number(found.peak_rate().value) - number(plain.peak_rate().value)) < mpmath.mpf(10) ** -12


def test_a_mere_dead_time_has_the_integrals_of_the_input() -> None:
    """Size times half the period, and the square of the size times three eighths of it."""
    found, _ = bump([1], [1], Fraction(5, 7))
    half, eighths = SIZE * PERIOD / 2, SIZE**2 * PERIOD * 3 / 8
    assert abs(number(found.absolute_integral()) - mpmath.mpf(half.numerator) / half.denominator) < 1e-12
    assert abs(number(found.squared_integral()) - mpmath.mpf(eighths.numerator) / eighths.denominator) < 1e-12
    assert abs(number(found.greatest().value) - SIZE) < 1e-12


@pytest.mark.parametrize(("above", "below"), [([1], [1, 0, 0, 0]), ([1, 0, 0], [1, 1])])
def test_what_is_not_searched_stays_open(above: Coefficients, below: Coefficients) -> None:
    given = Input("one_minus_cosine", {"size": fmpq(SIZE), "duration": rational(PERIOD)})
    found = respond_late([(late(above, below, fmpq(1)), given)])
    assert isinstance(found, Absent)
    assert not found.proved
