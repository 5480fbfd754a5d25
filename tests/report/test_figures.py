"""Figures: what is hatched is what is forbidden, bars are to scale, ticks are round, lines keep to their points."""

from __future__ import annotations

import math
import re
import xml.etree.ElementTree as ElementTree
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specgate.report.figures import poles, reserve, step
from specgate.report.figures.poles import Point, PoleFigure
from specgate.report.figures.reserve import ReserveBar
from specgate.report.figures.scales import Scale, simplified
from specgate.report.figures.step import Cross, Edge, Ring, StepFigure

SVG = "{http://www.w3.org/2000/svg}"
TIMES = tuple(k / 10 for k in range(101))
CURVE = tuple(1 - math.exp(-t) for t in TIMES)


def drawn(text: str) -> ElementTree.Element:
    return ElementTree.fromstring(text)


def hatched(root: ElementTree.Element) -> list[tuple[float, float, float, float]]:
    """The hatched rectangles: left, top, right, bottom."""
    found = []
    for element in root.iter(f"{SVG}rect"):
        if element.get("fill", "").startswith("url(#"):
            x, y, width, height = (float(element.get(key, "0")) for key in ("x", "y", "width", "height"))
            found.append((x, y, x + width, y + height))
    return found


def figure(*edges: Edge, **more: object) -> StepFigure:
    return StepFigure("f", "Title & <more>", "y", "m", TIMES, CURVE, 1.0, edges, **more)  # type: ignore[arg-type]


@pytest.mark.parametrize("forbidden", ["above", "below"])
def test_a_limit_on_a_level_is_hatched_on_its_forbidden_side(forbidden: str) -> None:
    shown = figure(Edge("value", 0.9, forbidden, "R"))  # type: ignore[arg-type]
    _, y = step.axes(shown)
    ((_, top, _, bottom),) = hatched(drawn(step.draw(shown)))
    line = y(0.9)
    assert (bottom == pytest.approx(line, abs=0.1)) if forbidden == "above" else (top == pytest.approx(line, abs=0.1))


@pytest.mark.parametrize("forbidden", ["above", "below"])
def test_a_limit_on_a_time_is_hatched_on_its_forbidden_side(forbidden: str) -> None:
    shown = figure(Edge("time", 3.0, forbidden, "R"))  # type: ignore[arg-type]
    x, _ = step.axes(shown)
    ((left, _, right, _),) = hatched(drawn(step.draw(shown)))
    line = x(3.0)
    assert (left == pytest.approx(line, abs=0.1)) if forbidden == "above" else (right == pytest.approx(line, abs=0.1))


def test_after_a_settling_limit_all_but_the_band_is_forbidden() -> None:
    shown = figure(Edge("time", 3.0, "above", "R", outside=(0.95, 1.05)))
    x, y = step.axes(shown)
    upper, lower = hatched(drawn(step.draw(shown)))
    assert upper[0] == lower[0] == pytest.approx(x(3.0), abs=0.1)
    assert upper[3] == pytest.approx(y(1.05), abs=0.1)
    assert lower[1] == pytest.approx(y(0.95), abs=0.1)


def test_a_limit_far_beyond_the_curve_does_not_squeeze_it() -> None:
    near, far = (
        step.axes(figure(Edge("time", 20.0, "above", "R"))),
        step.axes(figure(Edge("time", 900.0, "above", "R"))),
    )
    assert near[0].high > 20.0
    assert far[0].high == 10.0
    assert hatched(drawn(step.draw(figure(Edge("time", 900.0, "above", "R"))))) == []


def test_a_wide_bound_is_drawn_as_a_bar() -> None:
    narrow = step.draw(figure(crosses=(Cross(3.0, 0.95, "time", 3.0, 3.0),)))
    wide = step.draw(figure(crosses=(Cross(3.0, 0.95, "time", 2.0, 4.0),)))
    assert wide.count("<line") == narrow.count("<line") + 1


def test_a_claim_is_an_open_ring() -> None:
    root = drawn(step.draw(figure(rings=(Ring(2.0, 0.9),))))
    rings = list(root.iter(f"{SVG}circle"))
    assert rings
    assert all(ring.get("fill") == "none" for ring in rings)


def test_titles_are_escaped_and_stand_first() -> None:
    root = drawn(step.draw(figure()))
    assert root[0].tag == f"{SVG}title"
    assert root[0].text == "Title & <more>"


def test_the_right_half_plane_is_hatched() -> None:
    root = drawn(poles.draw(PoleFigure("p", "p", (Point("pole", -1.0, 2.0), Point("pole", -1.0, -2.0)))))
    ((left, _, right, _),) = hatched(root)
    ((_, _, width, _),) = [tuple(float(n) for n in root.get("viewBox", "").split())]
    assert width / 2 < left < right < width


def test_points_far_out_are_named_instead_of_drawn() -> None:
    near = tuple(Point("pole", -1.0 - k / 10, 0.0) for k in range(4))
    text = poles.draw(PoleFigure("p", "p", (*near, Point("pole", -900.0, 0.0), Point("zero", -700.0, 40.0))))
    assert "◁ ✕ −900,  ○ −700 ± 40j" in text


@pytest.mark.parametrize(("relative", "left", "right"), [(0.5, 36.0, 51.0), (-0.5, 21.0, 36.0), (3.0, 36.0, 66.0)])
def test_the_bar_is_to_scale(relative: float, left: float, right: float) -> None:
    root = drawn(reserve.draw(ReserveBar(relative, "t")))
    (bar,) = root.iter(f"{SVG}rect")
    start, width = float(bar.get("x", "0")), float(bar.get("width", "0"))
    assert (start, start + width) == (left, right)
    assert (len(list(root.iter(f"{SVG}path"))) == 1) is (abs(relative) > 1)


@given(st.floats(-50, 50), st.floats(1e-6, 1e6), st.integers(2, 9))
def test_ticks_are_few_round_and_inside(start: float, length: float, about: int) -> None:
    scale = Scale(start * length, (start + 1) * length, 0.0, 100.0)
    ticks = list(scale.ticks(about))
    assert len(ticks) <= about + 1
    assert all(-0.001 <= scale(value) <= 100.001 for value, _ in ticks)
    for (one, _), (other, _) in pairwise(ticks):
        assert re.match(r"[125]\.0000e", f"{other - one:.4e}")
    assert len({text for _, text in ticks}) == len(ticks)


@given(st.lists(st.tuples(st.floats(0, 600), st.floats(0, 200)), min_size=2, max_size=60), st.floats(0.05, 5))
def test_a_simplified_line_keeps_to_its_points(points: list[tuple[float, float]], tolerance: float) -> None:
    points = sorted(points)
    kept = simplified(points, tolerance)
    assert kept[0] == points[0]
    assert kept[-1] == points[-1]
    for x, y in points:
        assert min(_distance((x, y), a, b) for a, b in pairwise(kept)) <= tolerance + 1e-6


def _distance(point: tuple[float, float], start: tuple[float, float], end: tuple[float, float]) -> float:
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = dx * dx + dy * dy
    share = 0.0 if length == 0 else ((point[0] - start[0]) * dx + (point[1] - start[1]) * dy) / length
    share = min(1.0, max(0.0, share))
    return math.hypot(point[0] - start[0] - share * dx, point[1] - start[1] - share * dy)
