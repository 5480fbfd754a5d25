"""Points of opened loops over frequency, against plain complex arithmetic."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable
from fractions import Fraction

import pytest

from specgate.review.types import BreakReview, Review

Reviewed = Callable[[str], Review]

LOOP = """
    specgate: 1
    project: {{id: T-1, title: Test, revision: A}}
    subsystems:
      plant: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: {numerator}, denominator: {denominator}}}}}
    loops:
      level:
        inputs: {{order: {{unit: 1}}}}
        signals: {{height: plant(order - height)}}
        breaks: {{main: height}}
        responses: {{lift: {{from: order, to: height, input: step, size: 1}}}}
"""


def opened(reviewed: Reviewed, numerator: str, denominator: str) -> BreakReview:
    return reviewed(LOOP.format(numerator=numerator, denominator=denominator)).loops["level"].breaks["main"]


@pytest.mark.parametrize(
    ("numerator", "denominator"),
    [
        ("[3, 7]", "[1, 4, 9, 0]"),
        ("[20]", "[1, 0.02, 4, 0.03, 1]"),
        ("[-2, 1]", "[5, 1, 1]"),
        ("[1]", "[1, 0]"),
        ("[8, 0, 2]", "[1, 3, 3, 1]"),
        ("[1e-7]", "[1, 1e-6, 0]"),
    ],
)
def test_points_against_complex_arithmetic(reviewed: Reviewed, numerator: str, denominator: str) -> None:
    found = opened(reviewed, numerator, denominator)
    curve = found.frequency_response
    assert curve is not None
    assert len(curve.frequency) <= 200
    assert list(curve.frequency) == sorted(set(curve.frequency))
    top, bottom = ([float(Fraction(c)) for c in p] for p in (found.numerator, found.denominator))
    for frequency, gain, phase in zip(curve.frequency, curve.gain_db, curve.phase_deg, strict=True):
        value = at(top, 1j * frequency) / at(bottom, 1j * frequency)
        assert gain == pytest.approx(20 * math.log10(abs(value)), rel=2e-4, abs=2e-3)
        turned = math.degrees(cmath.phase(value)) - phase
        assert turned == pytest.approx(360 * round(turned / 360), abs=0.05)


def at(polynomial: list[float], s: complex) -> complex:
    value = 0j
    for c in polynomial:
        value = value * s + c
    return value


def test_every_crossing_is_a_point(reviewed: Reviewed) -> None:
    found = opened(reviewed, "[300]", "[1, 6, 11, 6]")
    curve = found.frequency_response
    assert curve is not None
    points = {point[0]: point[1:] for point in zip(curve.frequency, curve.gain_db, curve.phase_deg, strict=True)}
    assert {one.kind for one in found.crossings} == {"gain", "phase"}
    for one in found.crossings:
        assert one.frequency.value is not None
        gain, phase = points[float(f"{one.frequency.value:.6g}")]
        assert gain == 0.0 if one.kind == "gain" else phase == pytest.approx(-180.0, abs=1e-9)


def test_a_light_resonance_is_not_stepped_over(reviewed: Reviewed) -> None:
    curve = opened(reviewed, "[1]", "[1, 0.00002, 1, 0]").frequency_response
    assert curve is not None
    assert max(curve.gain_db) == pytest.approx(20 * math.log10(1 / 0.00002), abs=0.1)


def test_a_constant_has_no_curve(reviewed: Reviewed) -> None:
    assert opened(reviewed, "[3]", "[1]").frequency_response is None


def test_the_curve_reaches_what_requirements_name(reviewed: Reviewed) -> None:
    review = reviewed(
        """
        specgate: 1
        project: {id: T-1, title: Test, revision: A}
        masks: {keep: {upper: [[0.001 rad/s, 90 dB], [3000 rad/s, 0 dB]]}}
        subsystems: {plant: {input: {unit: m}, output: {unit: m}, model: {gain: 1, integrators: 1, lags: [0.1 s]}}}
        loops:
          level:
            inputs: {order: {unit: m}}
            signals: {height: plant(order - height)}
            breaks: {main: height, other: {at: height, into: plant}}
        requirements:
          R-1:
            text: It shall stay in its mask.
            verification: analysis
            criterion: {break: level.main, measure: within_mask, mask: keep, equals: true}
        """
    )
    breaks = review.loops["level"].breaks
    asked, other = (breaks[name].frequency_response for name in ("main", "other"))
    assert asked is not None
    assert other is not None
    assert asked.frequency[0] <= 0.001 < other.frequency[0]
    assert asked.frequency[-1] >= 3000 > other.frequency[-1]
