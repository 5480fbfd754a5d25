"""Masks in pictures: in the unit of the curve, on the side that is forbidden, inside the frame."""

from __future__ import annotations

import re
from dataclasses import replace
from types import ModuleType

import pytest

from specgate.report.figures import masks, step
from specgate.report.figures.masks import Boundary
from specgate.report.parts import breaks, plots
from specgate.review.types import Amount, Beside, CriterionReview, FrequencyCurve, MaskReview, Result, Review

PANEL = (10.0, 0.0, 110.0, 50.0)


def drawn(boundary: Boundary) -> list[list[tuple[float, float]]]:
    parts = masks.draw(boundary, lambda t: 10 * t, lambda v: 50 - v, PANEL, "h")
    outlines = [re.search(r'points="([^"]*)"', part) for part in parts]
    return [
        [(float(x), float(y)) for x, y in (pair.split(",") for pair in found[1].split())] for found in outlines if found
    ]


def test_the_hatching_lies_on_the_forbidden_side_and_inside() -> None:
    (above,) = drawn(Boundary(((1.0, 20.0), (5.0, 30.0)), "above"))
    assert above == [(10.0, 30.0), (50.0, 20.0), (50.0, 11.0), (10.0, 21.0)]
    (below,) = drawn(Boundary(((1.0, 2.0), (5.0, 4.0)), "below"))
    assert below == [(10.0, 48.0), (50.0, 46.0), (50.0, 50.0), (10.0, 50.0)]


def test_a_limit_that_goes_on_reaches_the_frame_and_no_further() -> None:
    (kept,) = drawn(Boundary(((2.0, 20.0), (5.0, 20.0)), "above", forever=True))
    assert max(x for x, _ in kept) == 110.0
    (cut,) = drawn(Boundary(((0.0, 20.0), (50.0, 20.0)), "above"))
    assert (min(x for x, _ in cut), max(x for x, _ in cut)) == (10.0, 110.0)
    assert drawn(Boundary(((20.0, 20.0), (50.0, 20.0)), "above")) == []


def criterion(sample: ModuleType, mask: MaskReview, result: Result) -> tuple[Review, CriterionReview]:
    review = sample.review()
    plain = review.requirements["BD-SYS-11"].criteria[0]
    return review, replace(plain, measure="within_mask", mask=mask, result=result)


@pytest.mark.parametrize(
    ("unit", "final", "limits", "side"),
    [("%", 40.0, (44.0, 36.0), "above"), ("Pa", 40.0, (110.0, 90.0), "above"), ("%", -40.0, (-44.0, -36.0), "below")],
)
def test_a_mask_in_parts_of_the_change_turns_over_with_it(
    sample: ModuleType, unit: str, final: float, limits: tuple[float, float], side: str
) -> None:
    mask = MaskReview("time", unit, ((0.0, 110.0), (9.0, 110.0)), ((1.0, 90.0), (9.0, 90.0)), forever=True)
    left = Result(value=False, proof="exact", at=Beside(time=Amount(2.5, "s"), value=Amount(45.0, "Pa")))
    review, asked = criterion(sample, mask, left)
    response = review.loops["duct_pressure"].responses["follow"]
    measures = tuple(replace(m, value=final) if m.measure == "final_value" else m for m in response.measures)
    figure = plots.response_figure("l", "r", replace(response, measures=measures, unit="Pa"), [("R", asked)])
    assert figure is not None
    upper, lower = figure.masks
    assert (upper.points[0][1], lower.points[0][1], upper.forbidden) == (*map(pytest.approx, limits), side)
    assert [(cross.time, cross.value) for cross in figure.crosses] == [(2.5, 45.0)]
    assert step.draw(figure).count("<polygon") == 2


def test_a_mask_over_frequency_lies_in_the_panel_of_the_gain(sample: ModuleType) -> None:
    mask = MaskReview("frequency", "dB", ((1.0, 20.0), (100.0, -20.0)), (), forever=False)
    review, asked = criterion(sample, mask, Result(value=True, proof="exact"))
    opened = review.loops["duct_pressure"].breaks["main"]
    points = tuple(10.0 ** (k / 10) for k in range(-20, 21))
    curve = FrequencyCurve(points, tuple(-2.0 * k for k in range(-20, 21)), (-90.0,) * len(points))
    figure = breaks.figure("duct_pressure", "main", replace(opened, frequency_response=curve), [asked])
    assert figure is not None
    assert figure.masks == (Boundary(mask.upper, "above"),)
