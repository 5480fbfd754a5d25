"""The dead time that a sampled loop stands: stable a little before it, unstable a little after it."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest

from specgate.response.answers import Answer
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled

from .conftest import Case

CASES = {
    "one lag": Case(([1], [1, 1]), (["3/2"], [1]), 1),
    "fractional delay": Case(([1], [1, 1, 0]), (["3/4", "-1/4"], [1, "-1/10"]), "1/2", "1/3"),
    "two integrators": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
    "fast oscillation": Case((["33.64"], [1, "1.8792", "33.64"]), (["34/100"], [1]), "1/5"),
    "many periods": Case(([1], [1, 8, 28, 56, 70, 56, 28, 8, 1]), (["1/80"], [1, -1]), "1/5"),
    "a dead time to begin with": Case(([1], [1, 0]), (["1/2"], [1]), "1/5", "3/50"),
    "through z = -1": Case(([1], ["3/2", 1, 0]), (["6/5", "-13/20"], [1, "3/5"]), 2),
}


@pytest.mark.parametrize("name", CASES)
def test_the_loop_is_stable_before_and_unstable_after(name: str) -> None:
    case = CASES[name]
    loop = over_frequency(opened(solve_sampled(case.wiring()), "place"))
    assert loop is not None
    value = Fraction(float(loop.delay_margin().enclose(40).mid()))
    for factor, stable in ((1 - Fraction(1, 10**6), True), (1 + Fraction(1, 10**6), False)):
        late = replace(case, delay=Fraction(case.delay) + value * factor)
        assert solve_sampled(late.wiring()).stable is stable
    for share in ("1/7", "5/9", "13/14"):
        late = replace(case, delay=Fraction(case.delay) + value * Fraction(share))
        assert solve_sampled(late.wiring()).stable is True


def stood(case: Case) -> Answer:
    loop = over_frequency(opened(solve_sampled(case.wiring()), "place"))
    assert loop is not None
    return loop.delay_margin()


def test_a_margin_of_thousands_of_periods() -> None:
    """1/(s (s + 1)) under gain 1/2: as the period tends to zero, lag over frequency of the loop in s, 2.5131690 s."""
    fine = stood(Case(([1], [1, 1, 0]), (["1/2"], [1]), "1/1000"))
    finer = stood(Case(([1], [1, 1, 0]), (["1/2"], [1]), "1/10000"))
    limit = 2.5131690
    # the hold alone takes half a period away
    assert abs(float(fine.enclose(60).mid()) + 0.0005 - limit) < 1e-5
    assert abs(float(finer.enclose(60).mid()) + 0.00005 - limit) < 1e-6


def test_a_margin_of_whole_periods() -> None:
    """z (z - 1) + 1 has its roots on the circle: an integrator under gain 1/T stands one period."""
    margin = stood(Case(([1], [1, 0]), ([1], [1]), 1)).enclose(64)
    assert margin.contains(1)
    assert margin.rad() < 1e-18


@pytest.mark.parametrize(
    "case",
    [
        Case(([1], [1, 1]), (["1/2"], [1]), "1/2"),
        # |L| is one at zero frequency
        Case((["-1/2", 1], ["27/10", 1]), ([1], [1]), "1/4", "1/12"),
        # beside T = 1 the oscillation at 5.8 rad/s turns almost once in a period: lag over frequency would say 1.831 s
        Case((["33.64"], [1, "1.8792", "33.64"]), (["1/4"], [1]), 1),
    ],
)
def test_a_loop_that_any_delay_leaves_stable(case: Case) -> None:
    margin = stood(case)
    assert margin.absent is not None
    assert margin.absent.infinite
    for delay in ("1/9", "3/2", "29/3"):
        assert solve_sampled(replace(case, delay=Fraction(case.delay) + Fraction(delay)).wiring()).stable is True


def test_what_passes_straight_through_the_plant_may_stand_no_delay_at_all() -> None:
    """A sample that sees what is held at once sees what was held before as soon as it arrives a little later."""
    case = Case((["1/2", 1], [1, 0]), (["17/10", "-3/5"], [1, "-1/5"]), "1/10")
    assert solve_sampled(case.wiring()).stable is True
    assert solve_sampled(replace(case, delay="1/1000000").wiring()).stable is False
    assert stood(case).exact == 0


def test_the_worked_value_of_one_lag() -> None:
    """Plant 1/(s + 1), T = 1, gain 3/2: 1.8235677 s, though lag over frequency is 1.2235 s."""
    loop = over_frequency(opened(solve_sampled(CASES["one lag"].wiring()), "place"))
    assert loop is not None
    assert abs(float(loop.delay_margin().enclose(40).mid()) - 1.82356771345867) < 1e-10
