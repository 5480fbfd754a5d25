"""Damping and overshoot from a phase margin, rise from a bandwidth: ranges searched against proved values."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from math import exp, pi, sqrt
from typing import Any

import pytest
from flint import fmpq, fmpq_poly
from scipy.optimize import minimize_scalar

from specgate.approximations.features import Features
from specgate.approximations.table import entry
from specgate.approximations.whole import WholeLoop
from specgate.measures.measure import Arguments
from specgate.measures.subjects import LoopSubject
from specgate.measures.table import MEASURES
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.solution import solve

DAMPING, OVERSHOOT, RISE = (Arguments(measure=name) for name in ("damping_ratio", "overshoot", "rise_time"))
S = fmpq_poly([0, 1])


def rational(number: float) -> fmpq:
    return fmpq(round(float(number) * 10**7), 10**7)


class Loops:
    """Unity feedback around L, seen as a whole and as a response."""

    def __init__(self, build: Any) -> None:
        self.build = build

    def whole(self, numerator: fmpq_poly, denominator: fmpq_poly) -> WholeLoop:
        block = Block("l", ("e",), ("y",), {("y", "e"): numerator}, denominator)
        form = LinearForm(((fmpq(1), SignalRef("r")), (fmpq(-1), SignalRef("y"))))
        signals = {"y": LinearForm(((fmpq(1), OutputRef("l", "y")),))}
        solution = solve(Wiring(("r",), (Instance("l", block, {"e": form}),), signals))
        return WholeLoop(LoopSubject(solution), {"b": self.build.opened(numerator, denominator)})

    def response(self, numerator: fmpq_poly, denominator: fmpq_poly) -> Features:
        features = self.build.closed(numerator, denominator)
        opened = self.build.opened(numerator, denominator)
        found: Features = features.beside(lambda: {"b": opened})
        return found


@pytest.fixture(scope="module")
def loops(build: Any) -> Loops:
    return Loops(build)


def type_one(damping: fmpq, poles: Sequence[fmpq] = (), zeros: Sequence[fmpq] = ()) -> tuple[fmpq_poly, fmpq_poly]:
    """Return 1/(s(s + 2 zeta)) with further real poles and zeros at minus these places, gain of each 1 at zero."""
    above, below = fmpq_poly([1]), S * (S + 2 * damping)
    for pole in poles:
        below *= 1 + S / pole
    for zero in zeros:
        above *= 1 + S / zero
    return above, below


def searched(error: Callable[[float], float | None], low: float, high: float) -> tuple[float, float]:
    """Return the least and greatest error on a range: a grid, then a search about its best points; None is no error."""
    grid = [low + (high - low) * k / 16 for k in range(17)]
    values = {point: value for point in grid if (value := error(point)) is not None}

    def best(sign: int) -> float:
        start = min(values, key=lambda point: sign * values[point])
        near = (max(low, start - (high - low) / 16), min(high, start + (high - low) / 16))

        def cost(point: float) -> float:
            value = error(float(point))
            return 9.0 if value is None else sign * value

        inner = minimize_scalar(cost, bounds=near, method="bounded", options={"maxiter": 9})
        return sign * min(float(inner.fun), sign * values[start])

    return best(1), best(-1)


EDGE = 0.6122869
"""Damping ratio at which the phase margin of the pair alone is 60 deg."""


def test_damping_of_the_pair_alone(loops: Loops, shown: Any) -> None:
    row = entry("damping_from_phase_margin")
    found = searched(lambda x: shown.error(row, loops.whole(*type_one(rational(x))), DAMPING), 0.001, EDGE)
    shown.tight(found, fmpq(-21, 1000), fmpq(146, 1000))


def test_overshoot_of_the_pair_alone(loops: Loops, shown: Any) -> None:
    row = entry("overshoot_from_phase_margin")
    found = searched(lambda x: shown.error(row, loops.response(*type_one(rational(x))), OVERSHOOT), 0.01, EDGE)
    shown.tight(found, fmpq(-123, 1000), fmpq(81, 1000))


def in_range(row: Any, view: Any, arguments: Arguments, shown: Any) -> float | None:
    return float(shown.error(row, view, arguments)) if shown.holds(row, view, arguments) else None


@pytest.mark.parametrize(
    ("name", "low", "high", "seen"),
    [
        ("damping_from_phase_margin", -56, 158, "whole"),
        ("overshoot_from_phase_margin", -140, 240, "response"),
    ],
)
def test_with_a_pole_or_a_zero_far_away(loops: Loops, shown: Any, name: str, low: int, high: int, seen: str) -> None:
    """One real pole, one zero to either side, at the nearest place allowed; the damping ratio is searched."""
    row, arguments = entry(name), DAMPING if seen == "whole" else OVERSHOOT
    view = getattr(loops, seen)

    def found(side: int, *, pole: bool) -> tuple[float, float]:
        def error(damping: float) -> float | None:
            place = side * rational(10.00001 * crossover(damping, pole=pole))
            added = ((place,), ()) if pole else ((), (place,))
            return in_range(row, view(*type_one(rational(damping), *added)), arguments, shown)

        return searched(error, 0.02, 0.75)

    every = [*found(1, pole=True), *found(1, pole=False), *found(-1, pole=False)]
    shown.tight((min(every), max(every)), fmpq(low, 1000), fmpq(high, 1000))


def crossover(damping: float, *, pole: bool) -> float:
    """Return where 1/(s(s + 2 zeta)), times or over 1 + s/(10 wc), has the gain one: |L|^2 is a multiple of 1.01."""
    factor = 1.01 if pole else 1 / 1.01
    return sqrt(sqrt(4 * damping**4 + 1 / factor) - 2 * damping**2)


# poles and zeros in crossover frequencies of the loop without them
CROWDS = [((20, 21), ()), ((), (22, -24)), ((30,), (-31,)), ((40, 41), (50,)), ((), (-21, -23)), ((), (21, 22))]


@pytest.mark.parametrize(("poles", "zeros"), CROWDS)
def test_several_far_away_stay_inside(loops: Loops, shown: Any, poles: Any, zeros: Any) -> None:
    counted = 0
    for damping in (0.05, 0.2, 0.4, 0.55, 0.65):
        crossover = sqrt(sqrt(1 + 4 * damping**4) - 2 * damping**2)
        added = [[rational(place * crossover) for place in places] for places in (poles, zeros)]
        above, below = type_one(rational(damping), *added)
        counted += in_range(entry("damping_from_phase_margin"), loops.whole(above, below), DAMPING, shown) is not None
        in_range(entry("overshoot_from_phase_margin"), loops.response(above, below), OVERSHOOT, shown)
    assert counted >= 2


def test_the_chain_is_the_two_rules_one_after_the_other(loops: Loops) -> None:
    above, below = type_one(fmpq(2, 5))
    ratio = float(entry("damping_from_phase_margin").evaluate(loops.whole(above, below), DAMPING).enclose(64).mid())
    value = entry("overshoot_from_phase_margin").evaluate(loops.response(above, below), OVERSHOOT).enclose(64)
    assert float(value.mid()) == pytest.approx(exp(-pi * ratio / sqrt(1 - ratio**2)), rel=1e-12)
    assert 0.43 < ratio < 0.44  # published: a phase margin of 43.1 deg at zeta = 0.4


def test_a_margin_of_exactly_sixty_degrees(loops: Loops, shown: Any) -> None:
    """L = 2/(3 s(s + 1)) crosses one at 1/sqrt(3) rad/s, where 60 deg are left; with a millionth less gain, more."""
    row = entry("damping_from_phase_margin")
    assert shown.holds(row, loops.whole(fmpq_poly([2]), 3 * S * (S + 1)), DAMPING)
    less = fmpq_poly([fmpq(1999999, 10**6)])
    assert not shown.holds(row, loops.whole(less, 3 * S * (S + 1)), DAMPING)


def test_other_loops(loops: Loops, shown: Any) -> None:
    """A zero that the crossover sees makes 40 % of overshoot where the margin of 38 deg promises 27 %."""
    row = entry("overshoot_from_phase_margin")
    double = loops.response(1 + S * fmpq(7, 10), S * S)
    read = MEASURES["overshoot"].read
    assert read is not None
    assert not shown.holds(row, double, OVERSHOOT)
    formula = float(row.evaluate(double, OVERSHOOT).enclose(64).mid())
    truth = float(read(double.subject, OVERSHOOT).enclose(64).mid())
    assert (formula, truth) == (pytest.approx(0.2716, abs=1e-4), pytest.approx(0.4039, abs=1e-4))


# --- rise from bandwidth ---


def test_rise_of_a_pair_alone(build: Any, shown: Any) -> None:
    row = entry("rise_from_bandwidth")
    found = searched(lambda x: shown.error(row, build.pair(rational(x)), RISE), 0.5, 0.99999)
    shown.tight(found, fmpq(20, 1000), fmpq(57, 1000))


def test_rise_of_real_poles(build: Any, shown: Any) -> None:
    """From a single lag to many equal ones, which tend to a rise of 2.134 over the bandwidth."""
    row = entry("rise_from_bandwidth")
    found = searched(lambda x: shown.error(row, build.roots([-1, -rational(10**x)]), RISE), 0.0, 3.0)
    equal = [shown.error(row, build.roots([-1] * count), RISE) for count in (1, 2, 5, 12)]
    mixed = [shown.error(row, build.roots(poles), RISE) for poles in ([-1, -2, -9], [-1, -1, -30], [-1, -4, -4, -5])]
    assert equal == sorted(equal)
    shown.tight((min(*found, *equal, *mixed), max(*found, *equal, *mixed)), fmpq(3, 1000), fmpq(31, 1000))


def test_where_the_rise_is_not_told_by_the_bandwidth(build: Any, shown: Any) -> None:
    row = entry("rise_from_bandwidth")
    assert shown.holds(row, build.pair("0.5"), RISE)
    assert not shown.holds(row, build.pair("0.4999999"), RISE)
    assert not shown.holds(row, build.roots([-1], [-9]), RISE)
    assert not shown.holds(row, build.pair("0.7", [-3]), RISE)
    assert not shown.holds(row, build.roots([-1]), Arguments(lower=fmpq(0), upper=fmpq(9, 10), measure="rise_time"))
    third = build.ratio([1], [1, 2, 2, 1])  # Butterworth: the text's 4 %
    read = MEASURES["rise_time"].read
    assert read is not None
    error = row.evaluate(third, RISE).enclose(64) / read(third.subject, RISE).enclose(64) - 1
    assert -0.045 < float(error.mid()) < -0.035
    light = build.pair("0.3")
    error = row.evaluate(light, RISE).enclose(64) / read(light.subject, RISE).enclose(64) - 1
    assert 0.145 < float(error.mid()) < 0.147
