"""Conditions: what is required, what is found, whether it holds; and the formulas where they do and do not apply."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import pytest
from flint import arb, fmpq

from specgate.approximations.approximation import Found
from specgate.approximations.features import Features
from specgate.approximations.table import APPROXIMATIONS, conditions
from specgate.measures.measure import Arguments, Band
from specgate.response.answers import Absent
from specgate.terms.verdicts import Trilean

TWO, FIVE, ONE = (Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (2, 5, 1))
OVERSHOOT, PEAK_TIME, RISE_TIME = (Arguments(measure=name) for name in ("overshoot", "peak_time", "rise_time"))


def audited(name: str, features: Features, arguments: Arguments) -> Mapping[str, Found]:
    """Return what every condition found, by its key (the row's own where a premise has the same)."""
    return {
        condition.key: condition.find(features, arguments, condition.threshold)
        for _, condition in conditions(name, arguments.measure)
    }


def broken(name: str, features: Features, arguments: Arguments) -> set[str]:
    found = audited(name, features, arguments)
    assert all(one.holds is not Trilean.UNKNOWN for one in found.values())
    return {key for key, one in found.items() if one.holds is Trilean.NO}


def number(found: Found) -> float:
    assert isinstance(found.value, arb)
    return float(found.value.mid())


def value(name: str, features: Features, arguments: Arguments) -> arb:
    return APPROXIMATIONS[name].evaluate(features, arguments).enclose(128)


def reason(name: str, features: Features, arguments: Arguments) -> str:
    absent = APPROXIMATIONS[name].evaluate(features, arguments).absent
    assert absent is not None
    return absent.reason


# --- the worked example of the format: 5.88 s + 2.52 over 0.085 s^3 + s^2 + 5.88 s + 2.52 ------------------------


def test_a_slow_pole_beside_the_pair(build: Any) -> None:
    gate = build.ratio(["5.88", "2.52"], ["0.085", 1, "5.88", "2.52"])
    assert {"separation", "zero_separation", "crowding"} <= broken("second_order_settling", gate, TWO)
    separation = audited("second_order_settling", gate, TWO)["separation"]
    assert abs(number(separation) - 0.082) < 0.0005
    assert abs(float(value("second_order_settling", gate, TWO).mid()) - 0.7079) < 5e-5


def test_without_the_slow_pole_it_is_in_range(build: Any) -> None:
    gate = build.ratio(["5.88"], ["0.085", 1, "5.88"])
    assert not broken("second_order_settling", gate, TWO)
    assert value("second_order_settling", gate, TWO).overlaps(arb(fmpq(4) * fmpq(17, 100)))
    accuracy = APPROXIMATIONS["second_order_settling"].accuracy(gate, TWO)
    assert accuracy is not None
    assert accuracy.lower == fmpq(-72, 1000)


# --- dominance ---


def test_exactly_five_times_faster_is_enough(build: Any) -> None:
    assert not broken("second_order_settling", build.pair("0.5", [-2.5]), TWO)
    assert "separation" in broken("second_order_settling", build.pair("0.5", ["-2.499999999999"]), TWO)


def test_a_natural_frequency_times_five_is_seen_as_five(build: Any) -> None:
    assert not broken("second_order_overshoot", build.pair("0.3", [-5]), OVERSHOOT)
    assert not broken("second_order_overshoot", build.pair("0.3", [], [(-3, 4)]), OVERSHOOT)
    assert "distance" in broken("second_order_overshoot", build.pair("0.3", ["-4.999999999999"]), OVERSHOOT)


def test_the_decay_rate_is_the_wrong_yardstick_for_the_shape(build: Any) -> None:
    """At zeta = 0.1 a zero five decay rates away makes 176 % of a promised 73 %, a pole there leaves 21 %."""
    with_zero, with_pole = build.pair("0.1", [], [-0.5]), build.pair("0.1", [-0.5])
    assert not broken("dominant_pair", with_zero, TWO) & {"separation", "zero_separation"}
    assert "distance" in broken("second_order_overshoot", with_zero, OVERSHOOT)
    assert "distance" in broken("second_order_overshoot", with_pole, OVERSHOOT)
    assert abs(float(value("second_order_overshoot", with_zero, OVERSHOOT).mid()) - 0.729) < 0.001
    assert abs(float(with_zero.subject.response.greatest().value.enclose(64).mid()) - 2.76) < 0.005
    assert abs(float(with_pole.subject.response.greatest().value.enclose(64).mid()) - 1.21) < 0.005


def test_many_harmless_poles_are_not_harmless(build: Any) -> None:
    crowd = build.pair("0.5", [-2.6, -2.7, -2.8])
    assert "crowding" in broken("second_order_settling", crowd, TWO)
    assert not broken("second_order_settling", build.pair("0.5", [-2.6, -50]), TWO)


def test_a_lightly_damped_pair_is_changed_by_what_is_five_decay_rates_away(build: Any) -> None:
    found = audited("dominant_pair", build.pair("0.05", [-0.25]), TWO)
    assert found["separation"].holds is Trilean.YES
    assert found["pair_amplitude"].holds is Trilean.NO
    assert abs(number(found["pair_amplitude"]) - 0.25 / (0.2**2 + 1 - 0.05**2) ** 0.5) < 1e-12


def test_what_is_dropped_must_have_died_away(build: Any) -> None:
    slow_tail = build.pair("0.5", [-0.05], [-0.0525])
    found = audited("dominant_pair", slow_tail, TWO)
    assert found["dropped_amplitude"].holds is Trilean.NO
    assert number(found["dropped_amplitude"]) > 1
    assert number(audited("dominant_pair", build.pair("0.5", [-2.5]), TWO)["dropped_amplitude"]) < 1e-6


def test_far_poles_that_ring_together(build: Any) -> None:
    ringing = build.pair("0.2", [("-0.2", 25), ("-0.2", "25.1")])
    assert "dropped_at_peak" in broken("second_order_overshoot", ringing, OVERSHOOT)
    assert "dropped_at_peak" not in broken("second_order_overshoot", build.pair("0.2", [("-0.2", 25)]), OVERSHOOT)


def test_ringing_that_has_died_away_at_the_peak_still_counts(build: Any) -> None:
    """Zeros make a fast, well damped cluster start with a burst larger than the change."""
    burst = build.pair("0.2", [(-50, 5000), (-50, 5010)], [("-3", 6)])
    found = audited("second_order_overshoot", burst, OVERSHOOT)
    assert found["dropped_at_peak"].holds is Trilean.YES
    assert found["ringing"].holds is Trilean.NO
    assert number(found["ringing"]) > 1


def test_a_pair_that_is_as_good_as_real_does_not_ring(build: Any) -> None:
    assert not broken("second_order_overshoot", build.pair("0.3", [(-11, "0.01")]), OVERSHOOT)


def test_three_zeros_and_no_pole_near_make_a_spike(build: Any) -> None:
    spike = build.pair("0.4", [-1000], [-8, -8, -8])
    assert broken("second_order_overshoot", spike, OVERSHOOT) == {"excess_of_zeros"}
    assert spike.subject.response.greatest().value.enclose(64) > 1.9
    assert "excess_of_zeros" not in broken("second_order_overshoot", build.pair("0.4", [-7], [-8, -8, -9]), OVERSHOOT)


def test_a_repeated_pair_does_not_dominate_itself(build: Any) -> None:
    twice = build.roots([(-1, 2), (-1, 2)])
    assert "separation" in broken("second_order_settling", twice, TWO)
    assert "distance" in broken("second_order_overshoot", twice, OVERSHOOT)


def test_a_zero_at_the_origin_is_never_far(build: Any) -> None:
    washed_out = build.ratio([1, 0], [1, 1, 1])
    assert "zero_separation" in broken("second_order_settling", washed_out, TWO)
    assert "distance" in broken("second_order_overshoot", washed_out, OVERSHOOT)


@pytest.mark.parametrize("name", ["second_order_settling", "dominant_pair"])
def test_no_pair_no_value(build: Any, name: str) -> None:
    lags = build.roots([-1, -10])
    assert "pair" in broken(name, lags, TWO)
    assert "no complex pair" in reason(name, lags, TWO)


def test_an_unstable_pair(build: Any) -> None:
    growing = build.roots([("0.1", 2)])
    assert "stable" in broken("second_order_settling", growing, TWO)
    assert "does not settle" in reason("second_order_settling", growing, TWO)
    assert "does not settle" in reason("second_order_peak_time", growing, PEAK_TIME)


def test_a_hidden_unstable_mode_is_a_broken_condition(build: Any, hidden: Absent) -> None:
    concealed = build.roots([(-1, 2)], void=hidden)
    assert audited("second_order_settling", concealed, TWO)["stable"].value == hidden.reason
    assert "stable" in broken("second_order_settling", concealed, TWO)
    assert "poles" in broken("final_value_theorem", concealed, Arguments(measure="final_value"))


def test_damping_outside_the_published_range(build: Any) -> None:
    assert broken("second_order_settling", build.pair("0.95"), TWO) == {"damping"}
    assert broken("second_order_settling", build.pair("0.09"), TWO) == {"damping"}
    assert broken("second_order_settling", build.pair("0.85"), FIVE) == {"damping"}
    assert not broken("second_order_settling", build.pair("0.85"), ONE)
    assert not broken("second_order_settling", build.pair("0.9"), TWO)


def test_bands_the_formula_has_a_number_for(build: Any) -> None:
    three = Arguments(band=Band(fmpq(3, 100), relative=True), measure="settling_time")
    distance = Arguments(band=Band(fmpq(1, 50), relative=False), measure="settling_time")
    for name in ("second_order_settling", "slowest_pole_settling"):
        system = build.pair("0.5") if name.startswith("second") else build.roots([-1, -9])
        assert broken(name, system, three) == {"band"}
        assert "band" in broken(name, system, distance)
        assert "2 %" in reason(name, system, three)


def test_a_tighter_threshold_of_the_project(build: Any) -> None:
    separation = next(c for c in APPROXIMATIONS["dominant_pair"].conditions if c.key == "separation")
    seven_times = build.pair("0.5", [-3.5])
    assert separation.find(seven_times, TWO, separation.threshold).holds is Trilean.YES
    assert separation.find(seven_times, TWO, fmpq(10)).holds is Trilean.NO


# --- the pair's formulas ---------------------------------------------------------------------------------------------


def test_a_printed_settling_time_is_the_formula(build: Any) -> None:
    """Nise, example 4.5, prints 0.533 s for 100/(s^2 + 15 s + 100): that is 4/(zeta wn), 7.2 % short of 0.574 s."""
    system = build.ratio([100], [1, 15, 100])
    formula = value("second_order_settling", system, TWO)
    assert abs(formula - fmpq(533, 1000)) < 0.0005
    assert abs(system.subject.response.settling(fmpq(1, 50)).enclose(64) - 0.574260844868) < 1e-11


def test_the_pair_alone_as_a_basis(build: Any) -> None:
    system = build.pair("0.6", size=5)
    assert value("dominant_pair", system, OVERSHOOT).overlaps(value("second_order_overshoot", system, OVERSHOOT))
    assert value("dominant_pair", system, PEAK_TIME).overlaps(value("second_order_peak_time", system, PEAK_TIME))
    absolute = Arguments(measure="overshoot", absolute=True)
    assert (value("second_order_overshoot", system, absolute) / 5).overlaps(
        value("second_order_overshoot", system, OVERSHOOT)
    )
    for arguments in (TWO, OVERSHOOT, PEAK_TIME, RISE_TIME):
        accuracy = APPROXIMATIONS["dominant_pair"].accuracy(system, arguments)
        assert accuracy is not None
        assert accuracy.lower == accuracy.upper == 0


def test_the_first_measure_is_meant_where_none_is_named(build: Any) -> None:
    unnamed = Arguments(band=Band(fmpq(1, 50), relative=True))
    system = build.pair("0.6")
    assert value("dominant_pair", system, unnamed).overlaps(value("dominant_pair", system, TWO))


# --- single lag, real poles ---


@pytest.mark.parametrize(("arguments", "constant"), [(TWO, fmpq(4)), (FIVE, fmpq(3)), (ONE, fmpq(23, 5))])
def test_a_single_lag(build: Any, arguments: Arguments, constant: fmpq) -> None:
    lag = build.roots([-4])
    assert not broken("first_order_settling", lag, arguments)
    assert APPROXIMATIONS["first_order_settling"].evaluate(lag, arguments).exact == constant / 4


def test_a_single_lag_and_another_band(build: Any) -> None:
    ten = Arguments(band=Band(fmpq(1, 10), relative=True), measure="settling_time")
    lag = build.roots([-4])
    assert not broken("first_order_settling", lag, ten)
    assert value("first_order_settling", lag, ten).overlaps(lag.subject.response.settling(fmpq(1, 10)).enclose(128))


def test_more_than_a_single_lag(build: Any) -> None:
    assert broken("first_order_settling", build.roots([-4, -5]), TWO) == {"poles"}
    assert broken("first_order_settling", build.roots([-4], [-5]), TWO) == {"zeros"}
    assert "no single real pole" in reason("first_order_settling", build.roots([(-1, 2)]), TWO)


def test_four_poles_five_times_faster(build: Any) -> None:
    crowd = build.roots([-1, "-5.001", "-5.002", "-5.003", "-5.004"])
    assert broken("slowest_pole_settling", crowd, TWO) == {"tail_growth"}
    truth = crowd.subject.response.settling(fmpq(1, 50)).enclose(64)
    assert abs(float((4 / truth - 1).mid()) + 0.167) < 0.001
    assert APPROXIMATIONS["slowest_pole_settling"].alternatives == ("real_poles_settling",)
    assert not broken("real_poles_settling", crowd, TWO)
    assert value("real_poles_settling", crowd, TWO) > truth


def test_ratios_from_which_the_slowest_pole_is_safe(build: Any) -> None:
    """4/p1 is too short below ratio 11.87, 3/p1 below 234.8."""
    for arguments, band, below, above in ((TWO, (1, 50), "-11.8", "-11.9"), (FIVE, (1, 20), "-234", "-236")):
        for pole, safe in ((below, False), (above, True)):
            system = build.roots([-1, pole])
            truth = system.subject.response.settling(fmpq(*band)).enclose(128)
            assert (value("slowest_pole_settling", system, arguments) > truth) is safe


def test_real_poles_conditions(build: Any) -> None:
    assert broken("real_poles_settling", build.roots([-1, "-1.2"]), TWO) == {"ratio"}
    assert not broken("real_poles_settling", build.roots([-1, "-1.25"]), TWO)
    assert broken("real_poles_settling", build.roots([-1, -2], [-3]), TWO) == {"zeros"}
    assert broken("real_poles_settling", build.roots([-1, *range(-10, -2)]), TWO) == {"count"}
    assert "real_poles" in broken("real_poles_settling", build.roots([-1, (-3, 1)]), TWO)
    wide = Arguments(band=Band(fmpq(1, 10), relative=True), measure="settling_time")
    assert broken("real_poles_settling", build.roots([-1, -2]), wide) == {"band"}


def test_equal_poles_have_no_slowest(build: Any) -> None:
    equal = build.roots([-1, -1])
    assert {"separation", "tail_growth"} <= broken("slowest_pole_settling", equal, TWO)
    assert "no simple slowest" in reason("real_poles_settling", equal, TWO)


# --- final value ---


FINAL = Arguments(measure="final_value")


def test_the_limit_theorem_where_it_applies(build: Any) -> None:
    system = build.ratio([3], [2, 5, 6], 4)
    assert not broken("final_value_theorem", system, FINAL)
    assert APPROXIMATIONS["final_value_theorem"].evaluate(system, FINAL).exact == 2
    error = Arguments(measure="steady_state_error")
    assert APPROXIMATIONS["final_value_theorem"].evaluate(system, error).exact == 2


def test_the_limit_theorem_gives_a_number_where_nothing_settles(build: Any) -> None:
    for denominator in ([1, 0, 1], [1, -3, 1]):
        system = build.ratio([1], denominator)
        assert broken("final_value_theorem", system, FINAL) == {"poles"}
        assert APPROXIMATIONS["final_value_theorem"].evaluate(system, FINAL).exact == 1


def test_the_limit_theorem_on_an_integrator(build: Any) -> None:
    ramp = build.ratio([1], [1, 1, 0])
    assert broken("final_value_theorem", ramp, FINAL) == {"poles"}
    assert "infinite" in reason("final_value_theorem", ramp, FINAL)


# --- dropping zeros ---


def test_dropping_a_zero(build: Any) -> None:
    system = build.pair("0.5", [], [-5])
    assert not broken("distant_zero", system, OVERSHOOT)
    assert value("distant_zero", system, OVERSHOOT).overlaps(value("second_order_overshoot", system, OVERSHOOT))
    assert value("distant_zero", system, TWO).overlaps(value("dominant_pair", system, TWO))


def test_overshoot_points_that_a_zero_adds(build: Any) -> None:
    """A zero at -a sigma: a = 3 adds 26.8, 5.4, 0.87 points at zeta = 0.3, 0.5, 0.7; a = 5 adds 9.8, 1.7, 0.25."""
    points = {(3, "0.3"): 26.8, (3, "0.5"): 5.4, (3, "0.7"): 0.87, (5, "0.3"): 9.8, (5, "0.5"): 1.7, (5, "0.7"): 0.25}
    for (a, damping), added in points.items():
        system = build.pair(damping, [], [-a * fmpq(int(damping[2:]), 10)])
        more = system.subject.response.greatest().value.enclose(64) - 1 - value("distant_zero", system, OVERSHOOT)
        assert abs(100 * float(more.mid()) - added) < 0.06, (a, damping)
        assert "zero_distance" in broken("distant_zero", system, OVERSHOOT)


def test_zeros_that_cannot_be_dropped(build: Any) -> None:
    assert "zeros" in broken("distant_zero", build.pair("0.5"), OVERSHOOT)
    washed_out = build.ratio([1, 0], [1, 1, 1])
    assert "zero_distance" in broken("distant_zero", washed_out, OVERSHOOT)
    assert "origin" in reason("distant_zero", washed_out, OVERSHOOT)
