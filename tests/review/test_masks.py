"""Masks as they stand in a Review."""

from __future__ import annotations

import math
from collections.abc import Callable

import pytest

from specgate.review.types import MaskReview, Review

Reviewed = Callable[[str], Review]

TEXT = """
    specgate: 1
    project: {{id: T-1, title: Test, revision: A}}
    masks:
      rise: {{upper: {upper}, lower: {lower}, to: forever}}
    subsystems:
      plant: {{input: {{unit: mm}}, output: {{unit: mm}}, model: {{numerator: [2 1/s], denominator: [1 s, 1.6, 0]}}}}
    loops:
      level:
        inputs: {{order: {{unit: mm}}}}
        signals: {{height: plant(order - height)}}
        breaks: {{main: height}}
        responses: {{lift: {{from: order, to: height, input: step, size: 2 mm}}}}
    requirements:
      R-1:
        text: It shall stay in its mask.
        verification: analysis
        criterion: {{{subject}, measure: within_mask, mask: rise, equals: true}}
"""


def mask(reviewed: Reviewed, upper: str, lower: str, subject: str = "response: level.lift") -> MaskReview:
    text = TEXT.format(upper=upper, lower=lower, subject=subject)
    found = reviewed(text).requirements["R-1"].criteria[0].mask
    assert found is not None
    return found


def test_limits_in_the_unit_of_the_signal(reviewed: Reviewed) -> None:
    found = mask(reviewed, "[[0 s, 2.4 mm], [2 min, 0.003 m]]", "[[1 s, 0.5 mm], [4 s, 1.9 mm]]")
    assert (found.over, found.unit, found.forever) == ("time", "mm", True)
    assert found.upper == ((0.0, 2.4), (120.0, 3.0))
    assert found.lower == ((1.0, 0.5), (4.0, 1.9))


def test_limits_in_parts_of_the_change(reviewed: Reviewed) -> None:
    found = mask(reviewed, "[[0 s, 120 %], [2 s, 120 %], [2 s, 104 %], [9 s, 104 %]]", "[[1 s, 10 %], [4 s, 95 %]]")
    assert (found.unit, found.upper[1:3]) == ("%", ((2.0, 120.0), (2.0, 104.0)))


def test_limits_in_decibel_are_straight_over_the_logarithm_of_frequency(reviewed: Reviewed) -> None:
    found = mask(
        reviewed,
        "[[5 rad/s, 0 dB], [50 rad/s, -40 dB]]",
        "[[0.1 rad/s, 20 dB], [0.2 rad/s, -50 dB]]",
        "break: level.main",
    )
    assert (found.over, found.unit) == ("frequency", "dB")
    assert found.upper == ((5.0, 0.0), (50.0, -40.0))


def test_plain_gains_are_not_straight_in_decibel(reviewed: Reviewed) -> None:
    found = mask(reviewed, "[[5 rad/s, 1], [50 rad/s, 0.1]]", "[[0.1 rad/s, 9], [0.2 rad/s, 0]]", "break: level.main")
    assert len(found.upper) > 20
    for at, level in found.upper:
        assert level == pytest.approx(20 * math.log10(1 - 0.9 * (at - 5) / 45), abs=1e-3)
    assert found.lower[-1][0] < 0.2  # a gain of zero is nowhere in dB
