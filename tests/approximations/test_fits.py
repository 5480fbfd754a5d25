"""Fits to a pair: stated accuracies of the pair alone, swept over all damping ratios against proved values."""

from __future__ import annotations

from typing import Any

import pytest
from flint import arb, fmpq

from specgate.approximations.table import entry
from specgate.approximations.text import describe
from specgate.measures.measure import Arguments
from specgate.terms.precision import working_precision

RISE = Arguments(measure="rise_time")
FULL = Arguments(lower=fmpq(0), upper=fmpq(1), measure="rise_time")
DELAY = Arguments(measure="delay_time")
NEARLY_0, NEARLY_1 = fmpq(1, 5000), fmpq(4999, 5000)

# where it applies, and what is stated there for the pair alone, in per cent
OF_RISE = {
    "cubic": (fmpq(1, 10), fmpq(9, 10), "-0.25", "0.15"),
    "constant": (fmpq(2, 5), fmpq(3, 5), "-3", "23"),
    "linear": (fmpq(3, 10), fmpq(4, 5), "-5.7", "2.8"),
    "quadratic": (NEARLY_0, NEARLY_1, "-14.5", "4.3"),
    "linear_wide": (NEARLY_0, NEARLY_1, "-21.6", "25.3"),
}
OF_DELAY = {"quadratic": ("-1.12", "5.04"), "linear": ("-4.51", "4.57")}


def percent(text: str) -> fmpq:
    return fmpq(round(float(text) * 100), 10000)


@pytest.mark.parametrize("variant", OF_RISE)
def test_rise_of_the_pair_alone(build: Any, shown: Any, variant: str) -> None:
    least, most, lower, upper = OF_RISE[variant]
    row = entry("second_order_rise", variant)
    stated = row.accuracy(build.pair("0.5"), RISE)
    assert stated is not None
    assert (stated.lower, stated.upper) == (percent(lower), percent(upper))
    found = shown.extremes(lambda zeta: shown.error(row, build.pair(zeta), RISE), least, most)
    shown.tight(found, stated.lower, stated.upper)


@pytest.mark.parametrize("variant", OF_DELAY)
def test_delay_of_the_pair_alone(build: Any, shown: Any, variant: str) -> None:
    lower, upper = OF_DELAY[variant]
    row = entry("second_order_delay", variant)
    stated = row.accuracy(build.pair("0.5"), DELAY)
    assert stated is not None
    assert (stated.lower, stated.upper) == (percent(lower), percent(upper))
    found = shown.extremes(lambda zeta: shown.error(row, build.pair(zeta), DELAY), NEARLY_0, NEARLY_1)
    shown.tight(found, stated.lower, stated.upper)


@pytest.mark.parametrize("damping", ["0.001", "0.2", "0.5", "0.7071", "0.95", "0.999"])
def test_the_first_arrival_of_the_pair_is_exact(build: Any, shown: Any, damping: str) -> None:
    assert abs(shown.error(entry("second_order_rise_full"), build.pair(damping), FULL)) < 1e-18


def test_the_first_arrival_at_a_half(build: Any) -> None:
    """zeta = 1/2: (pi - pi/3)/(sqrt(3)/2), exactly."""
    value = entry("second_order_rise_full").evaluate(build.pair("0.5"), FULL).enclose(128)
    with working_precision(128):
        assert abs(value - 4 * arb.pi() / (3 * arb(3).sqrt())) < 1e-30


def test_what_a_rise_is_counted_between_is_part_of_the_formula(build: Any, shown: Any) -> None:
    pair = build.pair("0.5")
    assert not shown.holds(entry("second_order_rise_full"), pair, RISE)
    assert not shown.holds(entry("second_order_rise"), pair, FULL)
    assert not shown.holds(
        entry("second_order_rise"), pair, Arguments(lower=fmpq(0), upper=fmpq(9, 10), measure="rise_time")
    )
    assert shown.holds(entry("second_order_rise_full"), pair, FULL)


@pytest.mark.parametrize(("poles", "zeros"), [([-50], []), ([], [-50]), ([], [50])])
def test_fits_for_the_pair_alone(build: Any, shown: Any, poles: list[Any], zeros: list[Any]) -> None:
    more = build.pair("0.5", poles, zeros)
    assert not shown.holds(entry("second_order_delay"), more, DELAY)
    assert not shown.holds(entry("second_order_rise_full"), more, FULL)
    assert shown.holds(entry("second_order_rise"), more, RISE)


def test_a_further_pole_delays_by_its_time_constant(build: Any) -> None:
    """At five natural frequencies by 0.2/wn, a seventh of the delay of the pair alone."""
    alone, more = (
        build.pair("0.5", poles).subject.response.first_arrival(fmpq(1, 2)).enclose(64) for poles in ([], [-5])
    )
    assert abs(float((more - alone).mid()) - 0.2) < 0.01
    assert abs(float(((more - alone) / alone).mid()) - 1 / 7) < 0.015


@pytest.mark.parametrize(
    ("variant", "inside", "outside"),
    [
        ("cubic", ["0.1", "0.9"], ["0.0999999", "0.9000001"]),
        ("constant", ["0.4", "0.6"], ["0.3999999", "0.6000001"]),
        ("linear", ["0.3", "0.8"], ["0.2999999", "0.8000001"]),
        ("quadratic", ["0.0000001", "0.9999999"], []),
        ("linear_wide", ["0.0000001", "0.9999999"], []),
    ],
)
def test_ends_of_the_damping_ratio(build: Any, shown: Any, variant: str, inside: list[str], outside: list[str]) -> None:
    row = entry("second_order_rise", variant)
    assert all(shown.holds(row, build.pair(damping), RISE) for damping in inside)
    assert not any(shown.holds(row, build.pair(damping), RISE) for damping in outside)


def test_a_fit_of_rational_figures_is_rational(build: Any) -> None:
    assert entry("second_order_rise").evaluate(build.pair("0.5"), RISE).exact == fmpq(163525, 100000)
    assert entry("second_order_rise", "constant").evaluate(build.pair("0.5", ()), RISE).exact == fmpq(9, 5)
    assert entry("second_order_delay", "linear").evaluate(build.pair("0.5"), DELAY).exact == fmpq(27, 20)


@pytest.mark.parametrize("name", ["second_order_rise", "second_order_delay"])
def test_variants_are_told(name: str) -> None:
    row = entry(name)
    assert row.variant == row.variants[0].name
    text = describe(name)
    for one in row.variants:
        assert f"{one.name}: {one.formula}" in text.text
        assert one.source in text.source
    with pytest.raises(KeyError):
        entry(name, "quartic")
    with pytest.raises(KeyError):
        entry("second_order_settling", "cubic")


# --- a single lag ---


def test_rise_of_a_single_lag(build: Any, shown: Any) -> None:
    row, lag = entry("first_order_rise"), build.roots([-4])
    assert row.evaluate(lag, RISE).exact == fmpq(11, 20)
    stated = row.accuracy(lag, RISE)
    assert stated is not None
    assert stated.upper - stated.lower <= fmpq(1, 50000)
    assert 0.00126 < shown.error(row, lag, RISE) < 0.00127
    other = Arguments(lower=fmpq(1, 20), upper=fmpq(19, 20), measure="rise_time")
    assert abs(shown.error(row, lag, other)) < 1e-20
    with working_precision(128):
        assert abs(row.evaluate(lag, other).enclose(128) - arb(19).log() / 4) < 1e-30


def test_rise_of_what_is_no_single_lag(build: Any, shown: Any) -> None:
    row = entry("first_order_rise")
    assert not shown.holds(row, build.roots([-1, -100]), RISE)
    assert not shown.holds(row, build.roots([-1], [-100]), RISE)
    assert not shown.holds(row, build.roots([1]), RISE)
    absent = row.evaluate(build.roots([-1]), FULL).absent
    assert absent is not None
    assert "never reaches" in absent.reason
