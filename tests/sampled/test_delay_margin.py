"""The dead time that a sampled loop stands: stable a little before it, unstable a little after it."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest

from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled

from .conftest import Case

CASES = {
    "one lag": Case(([1], [1, 1]), (["3/2"], [1]), 1),
    "fractional delay": Case(([1], [1, 1, 0]), (["3/4", "-1/4"], [1, "-1/10"]), "1/2", "1/3"),
    "two integrators": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
    # beside T = 1 the oscillation at 5.8 rad/s turns almost once in a period: lag over frequency would say 1.831 s
    "fast oscillation": Case((["33.64"], [1, "1.8792", "33.64"]), (["1/4"], [1]), 1),
}


@pytest.mark.parametrize("name", CASES)
def test_the_loop_is_stable_before_and_unstable_after(name: str) -> None:
    case = CASES[name]
    loop = over_frequency(opened(solve_sampled(case.wiring()), "place"))
    assert loop is not None
    margin = loop.delay_margin()
    if margin.absent is not None:
        assert not margin.absent.proved
        assert "at least" in margin.absent.reason
        return
    value = Fraction(float(margin.enclose(40).mid()))
    for factor, stable in ((1 - Fraction(1, 10**6), True), (1 + Fraction(1, 10**6), False)):
        late = replace(case, delay=Fraction(case.delay) + value * factor)
        assert solve_sampled(late.wiring()).stable is stable


def test_the_worked_value_of_one_lag() -> None:
    """Plant 1/(s + 1), T = 1, gain 3/2: 1.8235677 s, though lag over frequency is 1.2235 s."""
    loop = over_frequency(opened(solve_sampled(CASES["one lag"].wiring()), "place"))
    assert loop is not None
    assert abs(float(loop.delay_margin().enclose(40).mid()) - 1.82356771345867) < 1e-10
