"""Bandwidth and resonance peak of a pair: stated accuracies against proved values, edges of the range."""

from __future__ import annotations

from typing import Any

import pytest
from flint import arb, fmpq

from specgate.approximations.table import entry
from specgate.measures.measure import Arguments
from specgate.terms.precision import working_precision

BANDWIDTH, PEAK = Arguments(measure="bandwidth"), Arguments(measure="resonance_peak")


@pytest.mark.parametrize(
    ("variant", "low", "high"),
    [("half_power", fmpq(1, 5000), fmpq(4999, 5000)), ("linear", fmpq(3, 10), fmpq(4, 5))],
)
def test_bandwidth(build: Any, shown: Any, variant: str, low: fmpq, high: fmpq) -> None:
    row = entry("bandwidth_from_pair", variant)
    stated = row.accuracy(build.pair("0.5"), BANDWIDTH)
    assert stated is not None
    found = shown.extremes(lambda zeta: shown.error(row, build.pair(zeta), BANDWIDTH), low, high)
    shown.tight(found, stated.lower, stated.upper)


def test_half_power_is_not_quite_three_decibels(build: Any, shown: Any) -> None:
    """zeta^2 = 1/2: the gain is 1/sqrt(1 + w^4), half power at wn, 3 dB at (10^(3/10) - 1)^(1/4) wn."""
    pair = build.ratio([4], [1, "2.828427124746190097603377448419396157139343750753896", 4])
    with working_precision(128):
        true = 2 * (arb(10) ** fmpq(3, 10) - 1).root(4)
        error = 2 / true - 1
    assert abs(shown.error(entry("bandwidth_from_pair"), pair, BANDWIDTH) - float(error.mid())) < 1e-15


@pytest.mark.parametrize("damping", ["0.001", "0.1", "0.3", "0.5", "0.7", "0.7071"])
def test_the_resonance_of_a_pair_is_exact(build: Any, shown: Any, damping: str) -> None:
    assert abs(shown.error(entry("resonance_from_damping"), build.pair(damping), PEAK)) < 1e-18


def test_the_short_form(build: Any, shown: Any) -> None:
    row = entry("resonance_from_damping", "short")
    found = shown.extremes(lambda zeta: shown.error(row, build.pair(zeta), PEAK), fmpq(1, 1000), fmpq(1, 2))
    shown.tight(found, fmpq(-134, 1000), fmpq(0))
    assert abs(shown.error(row, build.pair("0.2"), PEAK) + 0.0202) < 0.0001


def test_edges(build: Any, shown: Any) -> None:
    exact, short = entry("resonance_from_damping"), entry("resonance_from_damping", "short")
    line = entry("bandwidth_from_pair", "linear")
    assert not shown.holds(exact, build.pair("0.7072"), PEAK)
    assert not shown.holds(exact, build.ratio([1], [1, 2, 2]), PEAK)  # zeta = 1/sqrt(2), exactly
    assert shown.holds(short, build.pair("0.5"), PEAK)
    assert not shown.holds(short, build.pair("0.5000001"), PEAK)
    assert shown.holds(line, build.pair("0.3"), BANDWIDTH)
    assert shown.holds(line, build.pair("0.8"), BANDWIDTH)
    assert not shown.holds(line, build.pair("0.2999999"), BANDWIDTH)
    assert not shown.holds(line, build.pair("0.8000001"), BANDWIDTH)


@pytest.mark.parametrize(("poles", "zeros"), [([-50], []), ([], [-50])])
def test_for_the_pair_alone(build: Any, shown: Any, poles: list[Any], zeros: list[Any]) -> None:
    more = build.pair("0.5", poles, zeros)
    assert not shown.holds(entry("resonance_from_damping"), more, PEAK)
    assert not shown.holds(entry("bandwidth_from_pair"), more, BANDWIDTH)


def test_no_pair_no_value(build: Any) -> None:
    for name in ("resonance_from_damping", "bandwidth_from_pair"):
        assert entry(name).evaluate(build.roots([-1, -3]), PEAK).absent is not None
