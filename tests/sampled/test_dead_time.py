"""A dead time of a block in s beside a sampled block: what it does is what a later input does."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from flint import fmpq

from specgate.response.inputs import Input
from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.blocks import SampledWiring
from specgate.sampled.channel import channel, delayed, pieces
from specgate.sampled.drive import Drive, drive
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, Wiring

from .conftest import Case, exact, form, polynomial

CASES = {
    "fraction": (Case(([2], [1, 3, 2]), (["3/4", "-5/8"], [1, -1]), "1/5", "1/12"), "1/30"),
    "beyond a period": (Case(([2], [1, 3, 2]), (["3/8", "-5/16"], [1, -1]), "1/5"), "3/7"),
    "integrator": (Case(([1], [1, 1, 0]), (["3/10"], [1]), "1/2", "1/10"), "2/5"),
}
START = fmpq(0)
TIMES = [fmpq(1, 7), fmpq(5, 6), fmpq(7, 3), fmpq(11, 2), fmpq(13)]


def late(case: Case, dead_time: str) -> SampledWiring:
    wiring = case.wiring()
    (plant,) = wiring.continuous.instances
    moved = Instance(plant.name, replace(plant.block, dead_time=exact(dead_time)), plant.arguments)
    return replace(wiring, continuous=replace(wiring.continuous, instances=(moved,)))


def response(wiring: SampledWiring, source: str, signal: str = "place", begin: fmpq = START) -> PiecewiseResponse:
    solution = solve_sampled(wiring)
    given = drive(delayed(solution, [(source, Input("step", {"size": fmpq(1)}, begin))]))
    assert isinstance(given, Drive)
    return PiecewiseResponse(pieces(channel(solution, [source], form(**{signal: 1})), given))


@pytest.mark.parametrize("name", CASES)
def test_a_dead_time_of_the_plant_is_a_delay_of_the_law(name: str) -> None:
    case, dead_time = CASES[name]
    same = replace(case, delay=Fraction(case.delay) + Fraction(dead_time))
    one, other = response(late(case, dead_time), "ask"), response(same.wiring(), "ask")
    loaded = response(late(case, dead_time), "load"), response(same.wiring(), "load", begin=exact(dead_time))
    for first, second in ((one, other), loaded):
        assert all(first.enclose(time, 128).overlaps(second.enclose(time, 128)) for time in TIMES)
        assert first.final_value() == second.final_value()
        assert first.settling(fmpq(1, 50)).enclose(64).overlaps(second.settling(fmpq(1, 50)).enclose(64))
    first_loop, second_loop = (
        over_frequency(opened(solve_sampled(w), "place")) for w in (late(case, dead_time), same.wiring())
    )
    assert first_loop is not None
    assert second_loop is not None
    assert first_loop.phase_margin().enclose(64).overlaps(second_loop.phase_margin().enclose(64))
    assert solve_sampled(late(case, dead_time)).stable


def test_it_does_not_matter_where_in_a_chain_the_dead_time_is() -> None:
    """Two lags in series, the dead time in the first or in the second; the signal between them differs."""

    def chain(first: str, second: str) -> SampledWiring:
        wiring = Case(([1], [1, 1]), (["1/4"], [1, -1]), "1/4").wiring()
        blocks = [
            Block("drive", ("u",), ("y",), {("y", "u"): polynomial([1])}, polynomial([1, 2]), exact(first)),
            Block("gate", ("u",), ("y",), {("y", "u"): polynomial([2])}, polynomial([1, 1]), exact(second)),
        ]
        signals = {
            **wiring.continuous.signals,
            "speed": LinearForm(((fmpq(1), OutputRef("drive", "y")),)),
            "place": LinearForm(((fmpq(1), OutputRef("gate", "y")),)),
        }
        instances = (
            Instance("drive", blocks[0], {"u": form(drive=1)}),
            Instance("gate", blocks[1], {"u": form(speed=1)}),
        )
        return replace(wiring, continuous=Wiring(wiring.continuous.inputs, instances, signals))

    ways = [chain("3/10", "0"), chain("0", "3/10"), chain("1/10", "1/5")]
    for source in ("ask", "load"):
        values = [[response(way, source).enclose(time, 128) for time in TIMES] for way in ways]
        assert all(a.overlaps(b) and b.overlaps(c) for a, b, c in zip(*values, strict=True))
    early, later = (response(way, "load", "speed") for way in (ways[1], ways[0]))
    assert all(early.enclose(time, 128).overlaps(later.enclose(time + fmpq(3, 10), 128)) for time in TIMES[:2])
    margins = []
    for way in ways:
        loop = over_frequency(opened(solve_sampled(way), "place"))
        assert loop is not None
        margins.append(loop.gain_margin().enclose(64))
    assert margins[0].overlaps(margins[1])
    assert margins[1].overlaps(margins[2])


def test_delays_on_all_ways_are_limited_together() -> None:
    case = CASES["fraction"][0]
    for periods, allowed in ((49, True), (50, True), (51, False)):
        wiring = late(replace(case, delay=Fraction(periods, 5)), str(Fraction(periods, 5)))
        if allowed:
            assert wiring.punctual.late
            continue
        with pytest.raises(ValueError, match="add up to more than 100 sampling periods"):
            _ = wiring.punctual
