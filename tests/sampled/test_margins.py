"""Margins of sampled loops: reference cases, published values, an independent evaluation on the unit circle."""

from __future__ import annotations

import cmath
import json
import math
from collections.abc import Iterator
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from flint import arb, fmpq

from specgate.frequency.questions import OpenLoop
from specgate.response.answers import Answer
from specgate.sampled.blocks import SampledBlock, SampledInstance, SampledWiring
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled
from specgate.systems.blocks import LinearForm, SignalRef, Wiring
from specgate.systems.error_constants import acceleration_constant, loop_type, velocity_constant
from specgate.terms.precision import working_precision

from .conftest import Case, exact, form, polynomial

DATA = Path(__file__).resolve().parents[1] / "data" / "margin_cases.json"
DISCRETE = [case for case in json.loads(DATA.read_text()) if case.get("Ts")]


def loop_of(case: Case, signal: str = "place") -> OpenLoop:
    found = over_frequency(opened(solve_sampled(case.wiring()), signal))
    assert found is not None
    return found


def value(answer: Answer) -> arb:
    assert answer.absent is None, answer
    return answer.enclose(128)


def near(answer: Answer, expected: float | str, digits: int) -> None:
    ball = value(answer)
    with working_precision(160):
        tolerance = abs(arb(str(expected))) * arb(fmpq(1, 10**digits))
        assert abs(ball - arb(str(expected))) < tolerance, (ball, expected)


def in_z(case: dict[str, Any]) -> OpenLoop:
    """Unity feedback of a transfer function in z, nothing in s."""
    numerators = {("y", "u"): polynomial(case["num"])}
    block = SampledBlock("law", ("u",), ("y",), numerators, polynomial(case["den"]), fmpq(0))
    signals = {"error": form(ask=1, place=-1), "place": LinearForm(((fmpq(1), SignalRef("law.y")),))}
    instance = SampledInstance("law", block, {"u": form(error=1)})
    wiring = SampledWiring(exact(case["Ts"]), Wiring(("ask", "law.y"), (), signals), (instance,))
    found = over_frequency(opened(solve_sampled(wiring), "place"))
    assert found is not None
    return found


@pytest.mark.parametrize("case", DISCRETE, ids=lambda case: case["id"])
def test_reference_cases_in_z(case: dict[str, Any]) -> None:
    loop = in_z(case)
    near(loop.gain_margin(), case["gm"], 22)
    near(loop.sensitivity_peak(), case["ms"], 22)
    radians = math.radians(float(case["pm_deg"]))
    near(loop.phase_margin(), radians, 14)
    near(loop.crossover_frequency(), case["gcs"][0], 14)
    at = loop.gain_margin().at
    assert at is not None
    near(at["frequency"], case["w_gm"], 13)  # type: ignore[arg-type]


PUBLISHED = [
    # regression values of an open-source control library (its tests of discrete margins), hold equivalents of
    # 2/(s^3 + 3 s^2 + 2 s), T = 0.01, and 2/(s + 1)^3, T = 0.1
    (([2], [1, 3, 2, 0]), "1/100", {"crossover_frequency": 0.749367093279, "gain_margin": 2.95576137503}),
    (([2], [1, 3, 2, 0]), "1/100", {"phase_crossover_frequency": 1.4037246422, "least_distance": 0.429534546569}),
    (([2], [1, 3, 3, 1]), "1/10", {"crossover_frequency": 0.76625188733, "phase_margin": math.radians(65.4212183169)}),
    (([10000], [1, 101, 10100, 10000]), "1/1000", {}),
]


@pytest.mark.parametrize(("plant", "period", "expected"), PUBLISHED)
def test_published_values(plant: tuple[list[int], list[int]], period: str, expected: dict[str, float]) -> None:
    loop = loop_of(Case(plant, ([1], [1]), period))
    for name, reference in expected.items():
        near(getattr(loop, name)(), reference, 10)


def test_the_worked_limit_of_a_gain() -> None:
    """K on 1/(s(s+1)), T = 1 (Ogata 1995, example of a hold equivalent): stable up to K = 2.39221119118."""
    near(loop_of(Case(([1], [1, 1, 0]), ([1], [1]), 1)).gain_margin_up(), "2.39221119118", 11)


LOOPS = {
    "integrator and lag": Case(([1], [1, 1, 0]), (["3/10"], [1]), 1),
    "fractional delay": Case(([1], [1, 1, 0]), (["3/4", "-1/4"], [1, "-1/10"]), "1/2", "1/3"),
    "long delay": Case(([2, 1], [1, 2, 5]), (["3/10", "-1/4"], [1, -1]), "1/10", "1/4"),
    "two integrators": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
    "repeated lags": Case(([1], [1, 3, 3, 1]), (["6/5", "-23/20"], [1, -1]), "1/10", "1/40"),
    "direct path": Case(([1, 2], [2, 1]), (["1/5"], [1, -1]), "1/3", "1/9"),
    "oscillating plant": Case(([4], [1, "1/5", 4]), (["1/100", "1/100"], [1, -1]), "1/4"),
    "pole at z = -1": Case(([1], [1, 1]), (["-1/10", "1/10"], [1, 1]), "1/4"),
    "unstable plant": Case(([1], [1, -1]), ([3], [1]), "1/10", "1/50"),
}


def response_at(case: Case, points: int) -> Iterator[tuple[float, complex]]:
    """L(e^jwT) by its coefficients in floats; an independent route to the same numbers is the simulation."""
    transfer = opened(solve_sampled(case.wiring()), "place").transfer
    assert transfer is not None
    above, below = ([complex(float(c.mid())) for c in part.coeffs()] for part in transfer.in_z(256))
    period = float(Fraction(case.period))
    for k in range(1, points):
        w = math.pi * k / points / period
        z = cmath.exp(1j * w * period)
        yield w, sum(c * z**i for i, c in enumerate(above)) / sum(c * z**i for i, c in enumerate(below))


@pytest.mark.parametrize("name", LOOPS)
def test_nothing_on_the_circle_contradicts(name: str) -> None:
    """On 600 points no magnitude is above the peak, no distance below the least, no crossing is missing."""
    case = LOOPS[name]
    loop = loop_of(case)
    least = float(value(loop.least_distance()).mid())
    crossings = [c for c in loop.crossings() if c.kind == "gain"]
    before: float | None = None
    count = 0
    for w, at in response_at(case, 600):
        assert abs(1 + at) >= least * (1 - 1e-9)
        inside = abs(at) - 1
        count += before is not None and before * inside < 0
        before = inside
        if w < 1:
            gain, phase = loop.gain_at(exact(f"{w:.6f}")), loop.phase_at(exact(f"{w:.6f}"))
            assert abs(float(value(gain).mid()) - abs(at)) < 1e-4 * abs(at) + 1e-5
            turn = float(value(phase).mid()) - cmath.phase(at)
            assert abs(turn - 2 * math.pi * round(turn / 2 / math.pi)) < 1e-3
    assert count == len([c for c in crossings if c.frequency.exact is None])


@pytest.mark.parametrize("name", LOOPS)
def test_a_gain_margin_is_the_limit_of_stability(name: str) -> None:
    case = LOOPS[name]
    loop = loop_of(case)
    for ask, up in ((loop.gain_margin_up, True), (loop.gain_margin_down, False)):
        margin = ask()
        if margin.absent is not None:
            assert margin.absent.infinite
            continue
        middle = Fraction(float(margin.enclose(64).mid()))
        for factor, stable in ((middle * (1 - Fraction(1, 10**6)), True), (middle * (1 + Fraction(1, 10**6)), False)):
            by = factor if up else 1 / factor
            above = [by * Fraction(c) for c in case.controller[0]]
            moved = Case(case.plant, (above, case.controller[1]), case.period, case.delay)
            assert solve_sampled(moved.wiring()).stable is stable


@pytest.mark.parametrize("name", LOOPS)
def test_it_does_not_matter_where_a_single_loop_is_cut(name: str) -> None:
    margins = [loop_of(LOOPS[name], signal).phase_margin() for signal in ("place", "error", "sent", "drive")]
    first, *others = (value(margin) for margin in margins)
    assert all(other.overlaps(first) for other in others)


def test_error_constants_are_those_of_slow_signals() -> None:
    """(z - 1) L(z)/T at z = 1, from the coefficients in balls."""
    for name, constant, kind in (
        ("fractional delay", velocity_constant, 1),
        ("two integrators", acceleration_constant, 2),
    ):
        opening = opened(solve_sampled(LOOPS[name].wiring()), "place")
        assert opening.slow is not None
        assert opening.transfer is not None
        assert loop_type(opening.slow) == kind
        above, below = opening.transfer.in_z(256)
        with working_precision(256):
            divided = below
            for _ in range(kind):
                divided = divided.derivative()
            factor = math.factorial(kind)
            limit = above(arb(1)) / divided(arb(1)) * factor / arb(exact(LOOPS[name].period)) ** kind
            assert limit.overlaps(arb(constant(opening.slow)))
