"""Integrals of the error and rates of sampled responses, against sums over their pieces and values on a grid."""

from __future__ import annotations

import pytest
from flint import arb, fmpq

from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import step
from specgate.sampled.pieces import SampledPieces
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision

from .conftest import Case, exact, form

CASES = {
    "overshoot": (Case(([1], [1, 1, 0]), (["3/10"], [1]), 1, "1/4"), 120),
    "never passed": (Case(([1], [1, 1, 0]), (["1/10"], [1]), "1/2"), 1200),
    "one lag": (Case(([1], [1, 1]), (["3/10"], [1, -1]), "1/10", "1/30"), 900),
}


def response(case: Case, **signal: int) -> SampledPieces:
    return pieces(channel(solve_sampled(case.wiring()), ["ask"], form(**signal)), step("ask", fmpq(1)))


@pytest.mark.parametrize("name", CASES)
def test_integrals_are_those_of_the_pieces(name: str) -> None:
    """The square piece by piece; the magnitude from below and above by the areas and by the squares."""
    case, count = CASES[name]
    found = response(case, ask=1, place=-1)
    searched = PiecewiseResponse(found)
    squares = areas = arb(0)
    for index in range(count):
        left, right = found.kink(index), found.kink(index + 1)
        square, area = found.square(index, left, right, 128), found.area(index, left, right, 128)
        assert square is not None
        assert area is not None
        with working_precision(160):
            squares, areas = squares + square, areas + abs(area)
    whole = searched.squared_integral().enclose(64)
    with working_precision(160):
        assert abs(whole - squares) < arb(fmpq(1, 10**9)) * whole
        absolute = searched.absolute_integral().enclose(64)
        assert absolute > areas - arb(fmpq(1, 10**8))
        assert absolute < areas * arb(fmpq(103, 100))
        if name == "never passed":
            assert abs(absolute - areas) < arb(fmpq(1, 10**8)) * absolute


@pytest.mark.parametrize("name", CASES)
def test_no_rate_on_a_grid_is_higher(name: str) -> None:
    case, _ = CASES[name]
    found = response(case, place=1)
    peak = PiecewiseResponse(found).peak_rate()
    highest = peak.value.enclose(64)
    for k in range(1, 400):
        time = exact(case.period) * fmpq(k, 7) + fmpq(1, 1000)
        rate = found.derivatives(found.holding(time), arb(time), 96)[1]
        assert not abs(rate) > highest
    time = peak.time.enclose(64).mid().fmpq()
    sides = [max(found.holding(time) + k, 0) for k in (-1, 0, 1)]
    assert any(abs(found.derivatives(index, arb(time), 96)[1]).overlaps(highest) for index in sides)
