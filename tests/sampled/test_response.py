"""Responses of sampled loops at and between the samples, against an independent simulation in 50 digits."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from flint import arb, fmpq

from specgate.response.answers import Absent
from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import step
from specgate.sampled.pieces import SampledPieces
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision

from .conftest import Case, exact, form

CASES = {
    "integrator and lag": Case(([1], [1, 1, 0]), (["3/10"], [1]), 1),
    "fractional delay": Case(([1], [1, 1, 0]), (["3/4", "-1/4"], [1, "-1/10"]), "1/2", "1/3"),
    "delay of two periods and a half": Case(([2, 1], [1, 2, 5]), (["3/10", "-1/4"], [1, -1]), "1/10", "1/4"),
    "delay of a whole period": Case(([1], [1, 3]), (["1/2"], [1, -1]), "1/5", "1/5"),
    "two integrators": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
    "repeated lags": Case(([1], [1, 3, 3, 1]), (["6/5", "-23/20"], [1, -1]), "1/10", "1/40"),
    "plant that passes steps on": Case(([1, 2], [2, 1]), (["1/5"], [1, -1]), "1/3", "1/9"),
    "oscillating plant": Case(([4], [1, "1/5", 4]), (["1/100", "1/100"], [1, -1]), "1/4"),
    "stiff plant": Case(([1000], [1, 1001, 1000]), (["1/4"], [1, -1]), "1/4", "1/10"),
}
TIMES = [Fraction(k, 7) + Fraction(1, 13) for k in (0, 1, 2, 5, 13, 30, 55)]


def response(case: Case, source: str, **signal: int) -> SampledPieces:
    return pieces(
        channel(solve_sampled(case.wiring()), [source], form(**(signal or {"place": 1}))), step(source, fmpq(1))
    )


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("source", ["ask", "load"])
def test_values_hold_those_of_a_simulation(name: str, source: str) -> None:
    case = CASES[name]
    found = PiecewiseResponse(response(case, source))
    for time, reference in zip(TIMES, case.simulated(TIMES, source), strict=True):
        ball = found.enclose(exact(time), 100)
        with working_precision(160):
            assert ball.overlaps(arb(mpmath.nstr(reference, 45)) + arb(0, arb(fmpq(1, 10**38))))
            assert ball.rel_accuracy_bits() >= 100


@pytest.mark.parametrize("name", CASES)
def test_final_values_are_exact(name: str) -> None:
    case = CASES[name]
    final = response(case, "ask").final
    assert not isinstance(final, Absent)
    late = case.simulated([Fraction(80)])[0]
    assert abs(late - mpmath.mpf(int(final.p)) / int(final.q)) < 1e-2


@pytest.mark.parametrize("name", CASES)
def test_measures_are_bracketed_by_the_simulation(name: str) -> None:
    """What is searched is checked by values just beside it: the band, the level, the peak."""
    case = CASES[name]
    found = PiecewiseResponse(response(case, "ask"))
    final = found.final_value().exact
    assert final is not None
    settled = found.settling(abs(final) / 50).enclose(64)
    arrived = found.first_arrival(final * fmpq(9, 10)).enclose(64)
    middle = [Fraction(float(ball.mid())) for ball in (settled, arrived)]
    small = Fraction(1, 10**7)
    times = sorted([middle[1] - small, middle[1] + small, middle[0] - small, middle[0] + small])
    values = dict(zip(times, case.simulated(times), strict=True))
    size = mpmath.mpf(int(final.p)) / int(final.q)
    assert abs(values[middle[0] - small] - size) > abs(size) / 50 > abs(values[middle[0] + small] - size)
    assert values[middle[1] - small] < size * mpmath.mpf(9) / 10 < values[middle[1] + small]


def test_a_held_signal_is_a_staircase() -> None:
    found = response(CASES["fractional delay"], "ask", sent=1)
    assert found.jump(0) == 0
    for index in range(6):
        start, end = found.kink(index), found.kink(index + 1)
        value, *slopes = found.derivatives(index, arb((start + end) / 2), 128)
        assert all(slope.is_zero() for slope in slopes)
        assert value.overlaps(found.derivatives(index, arb(start), 128)[0])
    first = found.derivatives(1, arb(fmpq(2, 5)), 128)[0]
    assert first.overlaps(arb(fmpq(3, 4)))


def test_a_sample_sees_a_step_at_the_same_instant() -> None:
    found = response(CASES["two integrators"], "ask", sent=1)
    assert found.jump(0) == 3


def test_the_bound_of_the_end_holds_and_is_not_far() -> None:
    for name, case in CASES.items():
        found = response(case, "ask")
        searched = PiecewiseResponse(found)
        final = searched.final_value().exact
        assert final is not None
        bound = found.settled_by(abs(final) / 50)
        assert bound is not None, name
        settled = searched.settling(abs(final) / 50).enclose(64)
        assert settled < arb(bound) + arb(exact(case.period))
        assert arb(bound) < 3 * settled + 40 * arb(exact(case.period)), name


def test_rest_is_reached_exactly_by_a_deadbeat_law() -> None:
    """Two integrators driven so that all modes lie at z = 0: at rest after two periods, and for good."""
    case = Case(([1], [1, 0, 0]), (["5/2", "-3/2"], [1, "3/4"]), 1)
    solution = solve_sampled(case.wiring())
    assert solution.stable
    assert [str(c) for c in solution.components[0].exact.coeffs()] == ["0", "0", "0", "1"]
    found = response(case, "ask")
    assert found.lasting() == (0, fmpq(3))
    settled = PiecewiseResponse(found).settling(fmpq(1, 10**6)).enclose(64)
    assert settled < arb(3)
    assert settled > arb(fmpq(29, 10))
