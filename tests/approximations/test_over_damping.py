"""The error of a formula over damping ratio, against the same error of a proved response."""

from __future__ import annotations

from typing import Any

import pytest
from flint import fmpq

from specgate.approximations.over_damping import error_over_damping
from specgate.approximations.table import entry
from specgate.measures.measure import Arguments, Band
from specgate.measures.table import MEASURES

TWO, FIVE = (Arguments(band=Band(fmpq(band, 100), relative=True), measure="settling_time") for band in (2, 5))
RISE, DELAY = Arguments(measure="rise_time"), Arguments(measure="delay_time")


@pytest.mark.parametrize(
    ("name", "variant", "arguments"),
    [
        ("second_order_settling", None, FIVE),
        ("settling_envelope", None, TWO),
        ("second_order_rise", "linear", RISE),
        ("second_order_delay", None, DELAY),
    ],
)
def test_every_point_against_the_proved_response(
    build: Any, name: str, variant: str | None, arguments: Arguments
) -> None:
    row = entry(name, variant)
    read = MEASURES[arguments.measure].read
    assert read is not None
    for point in error_over_damping(row, arguments)[::4]:
        features = build.pair(point.damping)
        error = row.evaluate(features, arguments).enclose(64) / read(features.subject, arguments).enclose(64) - 1
        assert abs(float(error.mid()) - float(point.error.mid())) < 1e-9


def test_both_sides_of_a_jump() -> None:
    """At zeta = 0.779703 the settling time of a pair into 2 % jumps, and with it the error of 4/sigma."""
    points = error_over_damping(entry("second_order_settling"), TWO)
    before = [point for point in points if point.damping < fmpq(779703, 10**6)][-1]
    after = next(point for point in points if point.damping > fmpq(779704, 10**6))
    assert 0 < after.damping - before.damping < fmpq(1, 10**5)
    assert float(after.error.mid()) - float(before.error.mid()) > 0.4


def test_where_the_formulas_own_conditions_hold() -> None:
    holding = [
        point.damping for point in error_over_damping(entry("second_order_rise", "constant"), RISE) if point.holds
    ]
    assert (min(holding), max(holding)) == (fmpq(2, 5), fmpq(3, 5))
    five = [point.damping for point in error_over_damping(entry("second_order_settling"), FIVE) if point.holds]
    assert max(five) == fmpq(4, 5)


def test_an_exact_formula_has_no_error() -> None:
    for name, measure in (("second_order_overshoot", "overshoot"), ("second_order_peak_time", "peak_time")):
        points = error_over_damping(entry(name), Arguments(measure=measure))
        assert len(points) > 40
        assert all(point.error.contains(0) for point in points)


def test_no_picture_of_what_has_no_value() -> None:
    seven = Arguments(band=Band(fmpq(7, 100), relative=True), measure="settling_time")
    assert error_over_damping(entry("second_order_settling"), seven) == ()
