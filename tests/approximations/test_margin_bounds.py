"""Margins from the sensitivity peak and delay margins from crossovers, against proved margins of opened loops."""

from __future__ import annotations

from math import asin, degrees, pi
from typing import Any

import pytest
from flint import fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import differential_evolution

from specgate.approximations.table import APPROXIMATIONS, entry
from specgate.measures.measure import Arguments
from specgate.measures.table import MEASURES

ROW = entry("margins_from_sensitivity")
MARGINS = {name: Arguments(measure=name) for name in ROW.estimates}
DELAY = Arguments(measure="delay_margin")


def value(opened: Any, arguments: Arguments, row: Any = ROW) -> float:
    return float(row.evaluate(opened, arguments).enclose(64).mid())


# --- published figures: Skogestad, Postlethwaite 2005, after equation 2.47 ---


@pytest.mark.parametrize(
    ("peak", "gain", "phase"), [(fmpq(2), 2.0, 28.955), (fmpq(13066, 10000), 4.2616, 45.0)], ids=["two", "1.3066"]
)
def test_what_a_peak_leaves(build: Any, peak: fmpq, gain: float, phase: float) -> None:
    """A constant L of -1 + 1/Ms: the sensitivity is Ms at every frequency."""
    constant = 1 / peak - 1
    opened = build.opened(fmpq_poly([constant]), fmpq_poly([1]))
    assert value(opened, MARGINS["gain_margin_up"]) == pytest.approx(gain, rel=1e-4)
    assert degrees(value(opened, MARGINS["phase_margin"])) == pytest.approx(phase, abs=2e-3)
    assert degrees(value(opened, MARGINS["phase_margin"])) == pytest.approx(
        2 * degrees(asin(float(peak.q) / int(peak.p) / 2))
    )


@settings(max_examples=60, deadline=None)
@given(
    st.integers(1, 400),
    st.integers(0, 1),
    st.lists(st.integers(1, 60), min_size=1, max_size=4),
    st.lists(st.integers(-60, 60).filter(bool), max_size=1),
)
def test_never_above_the_truth(
    build: Any, shown: Any, gain: int, integrators: int, poles: list[int], zeros: list[int]
) -> None:
    opened = build.loop(fmpq(gain, 20), [0] * integrators + [fmpq(-p, 10) for p in poles], [fmpq(z, 5) for z in zeros])
    for name, arguments in MARGINS.items():
        read = MEASURES[name].read
        assert read is not None
        truth = read(opened.subject, arguments)
        if shown.holds(ROW, opened, arguments) and truth.absent is None:
            shown.error(ROW, opened, arguments)


def searched(build: Any, shown: Any, arguments: Arguments, sign: int) -> float:
    """Return the least (1) or greatest (-1) error that a search over gain, a pole pair and a zero finds."""

    def error(point: Any) -> float:
        gain, frequency, damping, zero = (fmpq(round(float(x) * 10**6), 10**6) for x in point)
        pair = fmpq_poly([1, 2 * damping / frequency, 1 / frequency**2])
        opened = build.opened(gain * fmpq_poly([1, zero]), pair * fmpq_poly([0, 1]))
        read = MEASURES[arguments.measure].read
        assert read is not None
        if not opened.stable or read(opened.subject, arguments).absent is not None:
            return 1.0
        return sign * float(shown.error(ROW, opened, arguments))

    bounds = [(0.01, 3.0), (0.3, 30.0), (0.005, 0.9), (0.0, 1.5)]
    return sign * float(differential_evolution(error, bounds, seed=3, maxiter=8, popsize=6, polish=False).fun)


@pytest.mark.parametrize("name", ["gain_margin_up", "phase_margin"])
def test_the_bound_is_reached(build: Any, shown: Any, name: str) -> None:
    assert -0.1 < searched(build, shown, MARGINS[name], -1) <= 1e-15


def test_the_bound_may_say_next_to_nothing(build: Any, shown: Any) -> None:
    """A resonance that comes to 0.99 of -1 leaves 90 degrees all the same; six degrees may leave any gain."""
    humming = build.opened(fmpq_poly([fmpq(1, 100)]), fmpq_poly([0, 1]) * fmpq_poly([1, fmpq(1, 99), 1]))
    assert -1 < shown.error(ROW, humming, MARGINS["phase_margin"]) < -0.9
    assert -0.01 < shown.error(ROW, humming, MARGINS["gain_margin_up"]) <= 0
    swinging = build.loop(10, [0, "-0.1", -1000])
    assert -1 < shown.error(ROW, swinging, MARGINS["gain_margin_up"]) < -0.9


def test_a_loop_that_is_stable_between_two_gains(build: Any, shown: Any) -> None:
    """L = 2/(s - 1): stable for gains above a half, so that the fall decides; the rise is without limit."""
    opened = build.loop(-2, [1])
    assert shown.holds(ROW, opened, MARGINS["gain_margin"])
    assert shown.error(ROW, opened, MARGINS["gain_margin"]) == pytest.approx(0.75 / 1 - 1, abs=0.26)
    assert value(opened, MARGINS["gain_margin"]) == value(opened, MARGINS["gain_margin_down"])


def test_no_limit_no_bound(build: Any) -> None:
    """L = 1/s: the sensitivity never exceeds one, and nothing limits the gain."""
    up = ROW.evaluate(build.loop(1, [0]), MARGINS["gain_margin"]).absent
    assert up is not None
    assert up.infinite


def test_an_unstable_loop_has_no_margins(build: Any, shown: Any) -> None:
    opened = build.loop(10, [-1, -1, -1])
    assert not shown.holds(ROW, opened, MARGINS["gain_margin"])
    assert shown.holds(ROW, build.loop(fmpq(7999999, 10**6), [-1, -1, -1]), MARGINS["gain_margin"])
    assert not shown.holds(ROW, build.loop(8, [-1, -1, -1]), MARGINS["gain_margin"])  # at the limit, exactly


# --- delay margin ---

EVERY, ONE = (entry("delay_margin_from_phase_margin", name) for name in ("every_crossover", "one_crossover"))


@pytest.mark.parametrize(("gain", "poles"), [(1, [0, -1]), (fmpq(1, 3), [0, -1, -5]), (9, [-1, -3])])
def test_the_delay_margin_of_one_crossover_is_exact(build: Any, shown: Any, gain: Any, poles: list[Any]) -> None:
    opened = build.loop(gain, poles)
    for row in (EVERY, ONE):
        assert abs(shown.error(row, opened, DELAY)) < 1e-18


def test_an_integrator(build: Any) -> None:
    """L = 2/s: 90 degrees at 2 rad/s stand pi/4 s."""
    assert value(build.loop(2, [0]), DELAY, ONE) == pytest.approx(pi / 4, abs=1e-15)


def test_the_crossover_of_least_phase_margin_need_not_decide(build: Any, shown: Any) -> None:
    above, below = fmpq_poly([1, fmpq(1, 100), fmpq(1, 16)]), fmpq_poly([1, fmpq(1, 125), fmpq(1, 25)])
    opened = build.opened(above, fmpq_poly([0, 1, fmpq(1, 2)]) * below)
    assert len(opened.gain_crossings) == 3
    assert opened.stable
    assert shown.holds(EVERY, opened, DELAY)
    assert not shown.holds(ONE, opened, DELAY)
    assert abs(shown.error(EVERY, opened, DELAY)) < 1e-18
    assert value(opened, DELAY, ONE) > 1.2 * value(opened, DELAY, EVERY)


def test_a_gain_that_does_not_fall_off(build: Any, shown: Any) -> None:
    held = build.opened(fmpq_poly([1, fmpq(999, 1000)]), fmpq_poly([0, 1]))
    lost = build.opened(fmpq_poly([1, 1]), fmpq_poly([0, 1]))
    assert shown.holds(EVERY, held, DELAY)
    assert not shown.holds(EVERY, lost, DELAY)
    read = MEASURES["delay_margin"].read
    assert read is not None
    assert read(lost.subject, DELAY).exact == 0


def test_a_loop_that_never_reaches_one(build: Any) -> None:
    absent = APPROXIMATIONS["delay_margin_from_phase_margin"].evaluate(build.loop("0.5", [-1]), DELAY).absent
    assert absent is not None
    assert absent.infinite
