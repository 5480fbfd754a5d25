"""What is drawn over a curve stands where its number belongs, whatever unit the number was written in."""

from __future__ import annotations

from dataclasses import replace
from types import ModuleType
from typing import Any

import pytest

from specgate.report.parts.conversion import ratio
from specgate.report.parts.plots import response_figure
from specgate.review.types import Amount, LimitReview, Result


@pytest.mark.parametrize(
    ("unit", "to", "expected"),
    [
        ("min", "s", 60.0),
        ("ms", "s", 0.001),
        ("mm", "m", 0.001),
        ("points", "%", 1.0),
        ("K", "degC", 1.0),
        ("l/min", "m3/h", 0.06),
        ("1", "1", 1.0),
        ("s", "m", None),
        ("%", "m", None),
        ("%", "1", None),
        ("dB", "1", None),
        ("count", "m", None),
    ],
)
def test_units_are_converted_where_they_measure_the_same(unit: str, to: str, expected: float | None) -> None:
    assert ratio(unit, to) == (None if expected is None else pytest.approx(expected))


def figure(sample: ModuleType, requirement: str, **changes: Any) -> Any:
    review = sample.review()
    criterion = replace(review.requirements[requirement].criteria[0], **changes)
    loop, _, name = criterion.on.partition(".")
    return response_figure(loop, name, review.loops[loop].responses[name], [(requirement, criterion)])


def test_a_limit_in_minutes_stands_at_its_seconds(sample: ModuleType) -> None:
    basis = replace(sample.review().requirements["BD-SYS-11"].criteria[0].basis, claimed=Amount(0.01, "min"))
    drawn = figure(
        sample,
        "BD-SYS-11",
        limit=LimitReview(at_most=Amount(0.05, "min")),
        result=Result(0.08, 0.0799, 0.0801, unit="min", proof="enclosed"),
        basis=basis,
    )
    assert [edge.at for edge in drawn.edges] == [pytest.approx(3.0)]
    assert [(c.time, c.low, c.high) for c in drawn.crosses] == [pytest.approx((4.8, 4.794, 4.806))]
    assert [ring.time for ring in drawn.rings] == [pytest.approx(0.6)]


@pytest.mark.parametrize(
    ("band", "outside"),
    [
        ("2 % of the change", (392.0, 408.0)),
        ("0.01 kPa", (390.0, 410.0)),
        ("2 % of span", None),
        ("2 m", None),
        ("wide", None),
    ],
)
def test_the_band_is_drawn_where_it_is_understood(
    sample: ModuleType, band: str, outside: tuple[float, float] | None
) -> None:
    (edge,) = figure(sample, "BD-SYS-11", arguments={"band": band}).edges
    assert edge.outside == (None if outside is None else pytest.approx(outside))


@pytest.mark.parametrize(
    ("measure", "limit", "edges"),
    [
        ("overshoot", LimitReview(at_most=Amount(10.0, "%")), [(440.0, "above")]),
        ("overshoot", LimitReview(at_most=Amount(0.02, "kPa")), [(420.0, "above")]),
        ("undershoot", LimitReview(at_most=Amount(10.0, "%")), [(-40.0, "below")]),
        (
            "maximum_value",
            LimitReview(between=(Amount(0.1, "kPa"), Amount(0.5, "kPa"))),
            [(100.0, "below"), (500.0, "above")],
        ),
        (
            "final_value",
            LimitReview(within=Amount(5.0, "Pa"), of=Amount(400.0, "Pa")),
            [(395.0, "below"), (405.0, "above")],
        ),
        ("minimum_value", LimitReview(at_least=Amount(-1.0, "Pa")), [(-1.0, "below")]),
        ("peak_deviation", LimitReview(at_most=Amount(3.0, "m")), []),
        ("rise_time", LimitReview(at_most=Amount(3.0, "s")), []),
    ],
)
def test_limits_on_levels(sample: ModuleType, measure: str, limit: LimitReview, edges: list[tuple[float, str]]) -> None:
    drawn = figure(sample, "BD-SYS-11", measure=measure, limit=limit, result=Result(None, reason="none"), arguments={})
    assert [(pytest.approx(edge.at), edge.forbidden) for edge in drawn.edges] == edges
    assert drawn.crosses == ()


def test_a_response_that_steps_down_is_mirrored(sample: ModuleType) -> None:
    review = sample.review()
    loop = review.loops["fan_speed"]
    criterion = replace(
        review.requirements["BD-SYS-11"].criteria[0],
        measure="overshoot",
        limit=LimitReview(at_most=Amount(10.0, "%")),
        result=Result(5.0, 5.0, 5.0, unit="%", proof="enclosed"),
    )
    drawn = response_figure("fan_speed", "load", loop.responses["load"], [("R", criterion)])
    assert drawn is not None
    assert [(edge.at, edge.forbidden) for edge in drawn.edges] == [(pytest.approx(-7.92), "below")]
    assert [cross.value for cross in drawn.crosses] == [pytest.approx(-7.56)]
