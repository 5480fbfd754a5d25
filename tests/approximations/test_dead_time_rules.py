"""Dead times as rational functions, limits of the crossover frequency, and the half rule: against proved values."""

from __future__ import annotations

from math import atan, degrees, log, sin
from typing import Any

import pytest
from flint import arb, fmpq, fmpq_poly
from mpmath import mp, mpf, taylor
from mpmath import pade as independent_pade
from scipy.optimize import brentq, minimize_scalar

from specgate.approximations.opened import OpenedLoop
from specgate.approximations.pade import approximant, of_dead_time, phase_error
from specgate.approximations.table import entry
from specgate.delays.open_loop import DelayedLoop
from specgate.measures.measure import Arguments, Band
from specgate.measures.reading import decided
from specgate.measures.subjects import BreakSubject
from specgate.measures.table import MEASURES
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_stability import is_stable
from specgate.terms.verdicts import Trilean

MARGIN, CROSSOVER = Arguments(measure="phase_margin"), Arguments(measure="crossover_frequency")
ORDERS = {"first_order": 1, "second_order": 2, "third_order": 3, "fourth_order": 4, "fifth_order": 5}
S = fmpq_poly([0, 1])


def late(above: fmpq_poly, below: fmpq_poly, dead_time: fmpq) -> OpenedLoop:
    """Return L = above/below e^(-dead_time s) at a break."""
    lead = below.leading_coefficient()
    transfer = DelayedTransfer(Quasi.of({dead_time: above / lead}), Quasi.rational(below / lead))
    stable = is_stable(transfer.numerator + transfer.denominator)
    return OpenedLoop("b", BreakSubject(transfer, decided(stable), DelayedLoop(transfer, stable)))


def truth(opened: OpenedLoop, arguments: Arguments) -> float:
    read = MEASURES[arguments.measure].read
    assert read is not None
    return float(read(opened.subject, arguments).enclose(64).mid())


# --- the approximants ---


@pytest.mark.parametrize(("above", "below"), [(1, 1), (2, 2), (3, 3), (5, 5), (3, 4), (4, 5), (0, 2)])
def test_approximants_against_an_independent_construction(above: int, below: int) -> None:
    with mp.workdps(40):
        p, q = independent_pade(taylor(lambda x: mp.exp(-x), 0, above + below), above, below)
    found = approximant(above, below)
    for mine, other in ((found.numerator, p), (found.denominator, q)):
        for power, coefficient in enumerate(other):
            assert abs(mpf(int(mine[power].p)) / int(mine[power].q) - coefficient) < mpf(10) ** -14


@pytest.mark.parametrize("order", range(1, 6))
def test_the_phase_error(order: int) -> None:
    """Published: 5 degrees at 1.07, 2.48, 4.05, 5.70, 7.41; and it only grows."""

    def error(angle: float) -> float:
        return degrees(float(phase_error(order, arb(angle), 64).mid()))

    at = brentq(lambda angle: error(angle) - 5, 0.1, 12)
    assert abs(at - (1.07, 2.48, 4.05, 5.70, 7.41)[order - 1]) < 0.006
    values = [error(0.25 * k) for k in range(1, 80)]
    assert values == sorted(values)
    assert values[0] > 0
    if order == 1:
        assert error(3) == pytest.approx(degrees(3 - 2 * atan(1.5)), abs=1e-12)


# --- the phase margin ---


@pytest.mark.parametrize("variant", ORDERS)
def test_the_accuracy_is_that_of_this_loop(shown: Any, variant: str) -> None:
    """Over the whole range of crossovers the error fills what is stated; the greatest is found by search."""
    row = entry("pade_dead_time", variant)
    edge = brentq(lambda x: degrees(float(phase_error(ORDERS[variant], arb(x), 64).mid())) - 5, 0.1, 12)

    def used(angle: float) -> float:
        theta = fmpq(round(float(angle) * 10**6), 10**6)
        opened = late(*crossing_near_one(theta), theta)
        if not shown.holds(row, opened, MARGIN):
            return 0.0
        error, stated = float(shown.error(row, opened, MARGIN)), row.accuracy(opened, MARGIN)
        assert stated is not None
        return error / float(stated.upper if error > 0 else stated.lower)

    best = minimize_scalar(lambda x: -used(x), bounds=(0.2, edge), method="bounded", options={"maxiter": 6})
    assert 0.9 < -best.fun <= 1


def crossing_near_one(theta: fmpq) -> tuple[fmpq_poly, fmpq_poly]:
    """Return a rational L of gain one at about 1 rad/s that is stable with a dead time of `theta`.

    An integrator while it stands that; else a resonance a little above one that points away from -1 there.
    """
    if theta < fmpq(3, 2):
        return fmpq_poly([1]), S
    return fmpq_poly([fmpq(21, 100) * (-1 if sin(float(theta)) > 0 else 1)]), S * S + S / 5 + 1


def test_edges(shown: Any) -> None:
    row = entry("pade_dead_time", "first_order")
    assert shown.holds(row, late(fmpq_poly([1]), S, fmpq(10689, 10000)), MARGIN)
    assert not shown.holds(row, late(fmpq_poly([1]), S, fmpq(107, 100)), MARGIN)
    two = Quasi.of({fmpq(1): fmpq_poly([fmpq(1, 4)]), fmpq(1, 2): fmpq_poly([fmpq(1, 4)])})
    transfer = DelayedTransfer(two, Quasi.rational(S))
    stable = is_stable(two + transfer.denominator)
    several = OpenedLoop("b", BreakSubject(transfer, decided(stable), DelayedLoop(transfer, stable)))
    assert several.late is None
    assert not shown.holds(row, several, MARGIN)
    assert row.evaluate(several, MARGIN).absent is not None


def test_an_unstable_loop_has_no_margin(shown: Any) -> None:
    opened = late(fmpq_poly([1]), S, fmpq(158, 100))  # pi/2 is the most that 1/s stands
    row = entry("pade_dead_time")
    assert not shown.holds(row, opened, MARGIN)
    assert shown.holds(row, late(fmpq_poly([1]), S, fmpq(157, 100)), MARGIN)


def test_the_magnitude_of_an_approximant_is_one() -> None:
    found = of_dead_time(4, fmpq(3, 2))
    assert found.numerator(-S) == found.denominator


# --- limits of the crossover frequency ---


def limit_of(opened: OpenedLoop, name: str) -> tuple[Trilean, float]:
    row = entry(name)
    found = next(one for one in row.conditions if one.key == "crossover")
    value = row.evaluate(opened, CROSSOVER)
    return found.find(opened, CROSSOVER, found.threshold).holds, float(value.enclose(64).mid())


def test_a_dead_time(build: Any) -> None:
    assert limit_of(late(fmpq_poly([1]), S, fmpq(1)), "dead_time_limit") == (Trilean.YES, 1.0)  # touched
    assert limit_of(late(fmpq_poly([1]), S, fmpq(1000001, 10**6)), "dead_time_limit")[0] is Trilean.NO
    assert entry("dead_time_limit").evaluate(build.loop(1, [0]), CROSSOVER).absent is not None


def test_a_zero_on_the_wrong_side(build: Any) -> None:
    """L = (1 - s/z)/s crosses one at 1/sqrt(1 - 1/z^2): half of z at z = sqrt(5)."""
    name = "right_half_plane_zero_limit"
    holds, value = limit_of(build.loop(1, [0], ["2.23607"]), name)
    assert (holds, value) == (Trilean.YES, pytest.approx(1.118035))
    assert limit_of(build.loop(1, [0], ["2.23606"]), name)[0] is Trilean.NO
    assert limit_of(build.loop("0.5", [0], [3, 8]), name)[1] == pytest.approx(1.5)
    assert entry(name).evaluate(build.loop(1, [0], [-3]), CROSSOVER).absent is not None


def test_an_unstable_pole(build: Any) -> None:
    """L = -k/(1 - s) = k/(s - 1) crosses one at sqrt(k^2 - 1): twice the pole at k = sqrt(5)."""
    name = "unstable_pole_limit"
    assert limit_of(build.loop("-2.23607", [1]), name) == (Trilean.YES, 2.0)
    assert limit_of(build.loop("-2.23606", [1]), name)[0] is Trilean.NO
    assert limit_of(build.loop(-9, [1]), name)[0] is Trilean.YES


def test_rules_of_plausibility_state_no_accuracy(build: Any) -> None:
    for name in ("dead_time_limit", "right_half_plane_zero_limit", "unstable_pole_limit"):
        assert entry(name).accuracy(build.loop(1, [0]), CROSSOVER) is None


# --- the half rule ---


def test_the_half_rule_is_not_for_times(build: Any, shown: Any) -> None:
    """Four equal lags: lag 1.5, dead time 2.5; the rise is 33 % too fast."""
    row, lags = entry("half_rule"), build.roots([-1, -1, -1, -1])
    rise = Arguments(measure="rise_time")
    value = float(row.evaluate(lags, rise).enclose(64).mid())
    assert value == pytest.approx(1.5 * log(9))
    read = MEASURES["rise_time"].read
    assert read is not None
    assert value / float(read(lags.subject, rise).enclose(64).mid()) - 1 == pytest.approx(-0.333, abs=0.003)
    settling = Arguments(band=Band(fmpq(1, 50), relative=True), measure="settling_time")
    assert float(row.evaluate(lags, settling).enclose(64).mid()) == pytest.approx(2.5 + 1.5 * log(50))
    delay = Arguments(measure="delay_time")
    assert float(row.evaluate(lags, delay).enclose(64).mid()) == pytest.approx(2.5 + 1.5 * log(2))
    assert not any(shown.holds(row, lags, arguments) for arguments in (rise, settling, delay))


def test_one_lag_is_itself(build: Any) -> None:
    value = entry("half_rule").evaluate(build.roots([-2]), Arguments(measure="delay_time")).enclose(64)
    assert float(value.mid()) == pytest.approx(log(2) / 2)


def test_the_half_rule_of_what_swings(build: Any) -> None:
    assert entry("half_rule").evaluate(build.pair("0.5"), Arguments(measure="rise_time")).absent is not None
    assert entry("half_rule").evaluate(build.roots([1]), Arguments(measure="rise_time")).absent is not None
