"""Opened loops on a sheet: what is left at a crossing, where it is drawn, and scales by powers of ten."""

from __future__ import annotations

import itertools
import math
import re

import pytest

from specgate.report.figures import frequency
from specgate.report.figures.scales import LogScale, clipped
from specgate.report.parts.breaks import BreakSheet, sheet
from specgate.review.types import Amount, Beside, BreakReview, CrossingReview, FrequencyCurve, MeasureResult


def crossing(kind: str, at: float | None, margin: float, direction: str, *, infinite: bool = False) -> CrossingReview:
    place = Amount(at, "rad/s", infinite=True if infinite else None)
    return CrossingReview(kind, place, Amount(margin, "deg" if kind == "gain" else "dB"), direction)


def integrator(*crossings: CrossingReview, turned: float = -90.0) -> BreakReview:
    """Return 1/s with some phase, from 0.01 to 100 rad/s, and crossings that are put on it."""
    points = tuple(10.0 ** (k / 20) for k in range(-40, 41))
    at = Beside(Amount(1.0, "rad/s"), direction="lag")
    margin = MeasureResult(90.0, 90.0, 90.0, unit="deg", proof="enclosed", measure="phase_margin", at=at)
    kind = MeasureResult(1, proof="exact", measure="loop_type")
    curve = FrequencyCurve(points, tuple(-20 * math.log10(w) for w in points), (turned,) * len(points))
    return BreakReview("out", (kind, margin), ("1",), ("1", "0"), crossings, frequency_response=curve)


def shown(opened: BreakReview) -> BreakSheet:
    return sheet("loop", "main", opened, [], {})


@pytest.mark.parametrize(
    ("one", "turned", "panel", "level", "limit"),
    [
        (crossing("gain", 1.0, 90.0, "lag"), -90.0, "phase", -90.0, -180.0),
        (crossing("gain", 1.0, 30.0, "lead"), -210.0, "phase", -210.0, -180.0),
        (crossing("gain", 1.0, 270.0, "lead"), -90.0, "phase", -90.0, 180.0),
        (crossing("gain", 1.0, 50.0, "lag"), -490.0, "phase", -490.0, -540.0),
        (crossing("phase", 2.0, 6.0, "up"), -180.0, "gain", -6.0, 0.0),
        (crossing("phase", 0.5, 6.0, "down"), -180.0, "gain", 6.0, 0.0),
    ],
)
def test_a_bar_reaches_from_the_curve_to_the_limit(
    one: CrossingReview, turned: float, panel: str, level: float, limit: float
) -> None:
    figure = shown(integrator(one, turned=turned)).figure
    assert figure is not None
    (mark,) = figure.marks
    assert (mark.panel, mark.level, mark.limit) == (panel, pytest.approx(level), limit)
    _, gain, phase = frequency.axes(figure)
    assert (gain if panel == "gain" else phase).holds(limit)


def test_the_crossing_that_a_margin_counts_from_is_the_broad_one() -> None:
    figure = shown(integrator(crossing("gain", 1.0, 90.0, "lag"), crossing("gain", 3.0, 120.0, "lag"))).figure
    assert figure is not None
    assert [mark.least for mark in figure.marks] == [True, False]
    drawn = frequency.draw(figure)
    assert "90 deg at 1 rad/s" in drawn
    assert "120 deg" not in drawn


def test_crossings_at_zero_and_infinity_are_told_and_not_drawn() -> None:
    both = (crossing("phase", 0.0, 9.5, "down"), crossing("gain", None, 60.0, "lag", infinite=True))
    found = shown(integrator(*both))
    assert [(row.what, row.frequency, row.margin, row.direction) for row in found.crossings] == [
        ("phase ±180 deg", "0 rad/s", "9.5 dB", "less gain"),
        ("gain 1", "infinite", "60 deg", "lag"),
    ]
    assert found.figure is not None
    assert found.figure.marks == ()


def test_margins_stand_with_their_frequency_and_the_rest_apart() -> None:
    found = shown(integrator())
    assert [(row.name, row.frequency, row.direction) for row in found.margins] == [("Phase margin", "1 rad/s", "lag")]
    assert [row.name for row in found.measures.rows] == ["Loop type"]


def test_what_cannot_be_read_off_is_not_drawn() -> None:
    points = tuple(10.0 ** (k / 10) for k in range(-100, 101))
    curve = FrequencyCurve(points, tuple(-20 * math.log10(w) for w in points), (-90.0,) * len(points))
    whole = BreakReview("out", (), ("1",), ("1", "0"), frequency_response=curve)
    figure = shown(whole).figure
    assert figure is not None
    assert max(map(abs, figure.gain)) <= frequency.REACH
    assert figure.frequency[0] < 1e-3
    assert figure.frequency[-1] > 1e3


def test_a_break_without_points_has_no_picture() -> None:
    assert shown(BreakReview("out", (), reason="not stable")).figure is None


def test_the_curves_stay_inside_their_panels() -> None:
    figure = shown(integrator(crossing("gain", 1.0, 90.0, "lag"))).figure
    assert figure is not None
    steep = frequency.FrequencyFigure("f", "t", figure.frequency, tuple(5 * v for v in figure.gain), figure.phase)
    paths = re.findall(r'<path d="M([\d.]+) ([\d.]+)l', frequency.draw(steep))
    assert all(frequency.GAIN[0] - 1 <= float(y) <= frequency.PHASE[1] + 1 for _, y in paths)


def test_powers_of_ten_are_equally_far_apart() -> None:
    scale = LogScale(0.02, 3000.0, 0.0, 100.0)
    pixels = [scale(value) for value, _ in scale.decades()]
    assert [text for _, text in scale.decades()] == ["0.1", "1", "10", "100", "1000"]
    gaps = [b - a for a, b in itertools.pairwise(pixels)]
    assert gaps == pytest.approx([gaps[0]] * 4)
    assert (scale(0.02), scale(3000.0)) == (0.0, 100.0)


def test_many_decades_are_not_all_labelled() -> None:
    assert 4 <= len(list(LogScale(1e-15, 1e15, 0.0, 1.0).decades())) <= 9


def test_a_line_is_cut_where_it_leaves() -> None:
    line = [(0.0, 0.0), (1.0, 10.0), (2.0, 10.0), (3.0, -10.0), (4.0, 0.0)]
    assert clipped(line, -5.0, 5.0) == [
        [(0.0, 0.0), (0.5, 5.0)],
        [(2.25, 5.0), (2.75, -5.0)],
        [(3.5, -5.0), (4.0, 0.0)],
    ]
    assert clipped([(0.0, 7.0), (1.0, 8.0)], -5.0, 5.0) == []
    assert clipped([(0.0, 1.0), (1.0, 1.0), (2.0, 2.0)], -5.0, 5.0) == [[(0.0, 1.0), (1.0, 1.0), (2.0, 2.0)]]
