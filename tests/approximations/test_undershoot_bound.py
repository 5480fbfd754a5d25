"""The undershoot that a zero right of the axis forces: never above the truth, however little it says."""

from __future__ import annotations

from typing import Any

import pytest
from flint import fmpq, fmpq_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.approximations.features import Features
from specgate.approximations.table import entry
from specgate.measures.measure import Arguments

ROW = entry("right_half_plane_undershoot")
UNDERSHOOT = Arguments(measure="undershoot")


def bound(features: Features, arguments: Arguments = UNDERSHOOT) -> float:
    return float(ROW.evaluate(features, arguments).enclose(64).mid())


def test_a_pair_with_a_zero_at_its_natural_frequency(build: Any, shown: Any) -> None:
    """zeta = 0.7: the truth is 24.9 %, the bound 0.11 %."""
    system = build.pair("0.7", [], [1])
    assert abs(bound(system) - 0.00115) < 0.00001
    assert abs(shown.error(ROW, system, UNDERSHOOT) + 0.9954) < 0.0001


def test_an_all_pass(build: Any) -> None:
    """(1 - s)/(1 + s) starts at -1 and settles into 2 % at ln 100: the bound is 0.98/99."""
    assert abs(bound(build.roots([-1], [1])) - 0.98 / 99) < 1e-15


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 500), st.integers(1, 99), st.integers(1, 300), st.integers(-300, 300))
def test_never_above_the_truth(build: Any, shown: Any, zero: int, damping: int, pole: int, other: int) -> None:
    zeros = [fmpq(zero, 100)] + ([fmpq(other, 50)] if other else [])
    system = build.pair(fmpq(damping, 100), [fmpq(-pole, 100)], zeros)
    if shown.holds(ROW, system, UNDERSHOOT):
        shown.error(ROW, system, UNDERSHOOT)


def test_how_near_it_comes(build: Any, shown: Any) -> None:
    """A response that stays at its undershoot and then jumps uses the bound up, and no finite number of modes jumps.

    Thirty equal lags behind an undershoot of five times the change come to 59 % of it; fourteen to 48 %.
    """
    for count, least in ((14, -0.53), (30, -0.41)):
        lags = fmpq_poly([1, fmpq(1, count)]) ** count
        above = [fmpq(6 if power == 0 else 0) - 5 * lags[power] for power in range(count, -1, -1)]
        system = build.ratio(above, [lags[power] for power in range(count, -1, -1)])
        assert abs(shown.error(ROW, system, UNDERSHOOT) - least) < 0.01


def test_the_smallest_zero_counts(build: Any) -> None:
    one, two = build.roots([-1, -2], [3]), build.roots([-1, -2], [3, 50])
    assert abs(bound(one) / bound(two) - 1) < 0.5
    read = ROW.conditions[1].find(two, UNDERSHOOT, None)
    assert float(read.value) == 3


def test_in_the_unit_of_the_signal(build: Any) -> None:
    plain, sized = build.roots([-1, -2], [3]), build.roots([-1, -2], [3], size=-7)
    absolute = Arguments(measure="undershoot", absolute=True)
    assert abs(bound(sized, absolute) - 7 * bound(plain)) < 1e-15
    assert abs(bound(sized) - bound(plain)) < 1e-15


@pytest.mark.parametrize(
    ("poles", "zeros"),
    [([-1, -2], []), ([-1, -2], [-3]), ([-1, -2], [(1, 2)]), ([1, -2], [3]), ([-1, -2], [0])],
    ids=["none", "left", "complex", "unstable", "origin"],
)
def test_where_nothing_is_forced(build: Any, shown: Any, poles: list[Any], zeros: list[Any]) -> None:
    system = build.roots(poles, zeros)
    assert not shown.holds(ROW, system, UNDERSHOOT)
    assert ROW.evaluate(system, UNDERSHOOT).absent is not None
