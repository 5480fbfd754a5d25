"""What is left of the error under a ramp, against the response a long time after."""

from __future__ import annotations

from dataclasses import replace

import pytest
from flint import arb, fmpq

from specgate.response.inputs import Input
from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import drive
from specgate.sampled.following import lasting_error
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision

from .conftest import Case, form

CASES = {
    "integrator and lag": Case(([1], ["2/5", 1, 0]), (["3/10"], [1]), "1/5"),
    "delayed": Case(([3], ["1/5", 1, 0]), (["2/5", "-1/5"], [1, "-1/2"]), "1/10", "1/30"),
    "a zero in the plant": Case((["1/2", 1], [1, 2, 0]), (["4/5"], [1]), "1/4", "1/4"),
    "two integrators": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
}


@pytest.mark.parametrize("name", CASES)
def test_the_error_tends_to_it_between_the_samples_too(name: str) -> None:
    ramp = Input("ramp", {"slope": fmpq(7, 3)})
    one = channel(solve_sampled(CASES[name].wiring()), ["ask"], form(ask=1, place=-1))
    error = lasting_error(one, ramp)
    assert error is not None
    found = PiecewiseResponse(pieces(one, drive([("ask", ramp)])))
    for time in (fmpq(150), fmpq(1501, 10), fmpq(15017, 100), fmpq(15023, 99)):
        with working_precision(160):
            assert abs(found.enclose(time, 96) - arb(error)) < arb(fmpq(1, 10**8))


def test_a_staircase_does_not_follow_a_ramp() -> None:
    case = Case(([1], [1, 1]), (["3/10"], [1, -1]), "1/2")
    ramp = Input("ramp", {"slope": fmpq(1)})
    one = channel(solve_sampled(case.wiring()), ["ask"], form(ask=1, place=-1))
    assert lasting_error(one, ramp) is None
    found = PiecewiseResponse(pieces(one, drive([("ask", ramp)])))
    with working_precision(96):
        assert abs(found.enclose(fmpq(100), 64) - found.enclose(fmpq(401, 4), 64)) > arb(fmpq(1, 50))


def test_a_dead_time_beside_the_samples_leaves_it_open() -> None:
    case = CASES["integrator and lag"]
    wiring = case.wiring()
    plant = replace(wiring.continuous.instances[0].block, dead_time=fmpq(1, 10))
    instances = (replace(wiring.continuous.instances[0], block=plant),)
    late = replace(wiring, continuous=replace(wiring.continuous, instances=instances))
    one = channel(solve_sampled(late), ["ask"], form(ask=1, place=-1))
    assert one.stable
    assert lasting_error(one, Input("ramp", {"slope": fmpq(1)})) is None
