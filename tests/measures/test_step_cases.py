"""Measures of 90 adversarial systems against 25-digit truths (`tests/data/step_cases.json`)."""

from __future__ import annotations

import json
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from flint import fmpq

from specgate.measures.measure import Band
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Answer

CASES: list[dict[str, Any]] = json.loads((Path(__file__).parents[1] / "data" / "step_cases.json").read_text())
DIGITS = 23
"""The last two of 25 printed digits are left to rounding."""


def exact(text: str) -> fmpq:
    number = Fraction(text)
    return fmpq(number.numerator, number.denominator)


FIGURES: dict[str, tuple[str, dict[str, Any], int]] = {
    "overshoot_pct": ("overshoot", {}, 100),
    "undershoot_pct": ("undershoot", {}, 100),
    "ts2": ("settling_time", {"band": Band(fmpq(1, 50), relative=True)}, 1),
    "ts5": ("settling_time", {"band": Band(fmpq(1, 20), relative=True)}, 1),
    "tr": ("rise_time", {}, 1),
    "tp": ("peak_time", {}, 1),
    "peak_abs": ("peak_deviation", {}, 1),
}


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["id"])
def test_figures(case: dict[str, Any], subject: Callable[..., ResponseSubject], read: Callable[..., Answer]) -> None:
    system = subject([exact(c) for c in case["numerator"]], [exact(c) for c in case["denominator"]])
    assert read("poles_at_origin", system).exact == case["integrators"]
    final = read("final_value", system)
    assert (final.absent is None) is bool(case["final_exists"])
    if final.exact is not None:
        assert abs(final.exact - exact(case["final_value"])) <= fmpq(1, 10**DIGITS)
    for key, (name, arguments, factor) in FIGURES.items():
        if case[key] is not None:
            _holds(read(name, system, **arguments), exact(case[key]) / factor, name)


def _holds(answer: Answer, truth: fmpq, name: str) -> None:
    """The enclosure agrees with the truth to its printed digits; a truth of 0 stands for at most 1e-15 per cent."""
    tolerance = abs(truth) / 10**DIGITS if truth else fmpq(1, 10**17)
    assert answer.absent is None, (name, answer.absent)
    ball = answer.enclose(192)
    assert not abs(ball - truth) > tolerance, (name, ball)
    assert float(ball.rad()) <= max(1e-9 * abs(float(ball.mid())), 1e-12), (name, ball)
