"""Odd and extreme loops go through the whole line: every question has an answer, a reason, or stays open."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from specgate.exchange.json import read, write
from specgate.review.types import Review

Reviewed = Callable[[str], Review]

LIMITS = (
    "settling_time, band: 2 %, at_most: 3 s",
    "settling_time, band: 0.1, at_most: 3 s",
    "overshoot, at_most: 5 %",
    "overshoot, at_most: 0.05",
    "final_value, within: 1, of: 1",
    "peak_time, at_most: 2 s",
    "rise_time, at_most: 2 s",
    "delay_time, between: [0.1 s, 1 s]",
    "maximum_value, at_most: 3",
    "minimum_value, at_least: -1",
    "peak_deviation, at_most: 2",
    "initial_value, within: 1, of: 0",
    "undershoot, at_most: 1 %",
    "steady_state_error, at_most: 0.1",
    "poles_at_origin, equals: 0",
    "settling_time, band: 2 %, at_most: 3 s, basis: {approximation: second_order_settling, claimed: 1 s}",
    "settling_time, band: 2 %, at_most: 3 s, basis: {approximation: slowest_pole_settling, claimed: 1 s}",
    "settling_time, band: 2 %, at_most: 3 s, basis: {approximation: real_poles_settling, claimed: 1 s}",
    "overshoot, at_most: 9 %, basis: {approximation: second_order_overshoot, claimed: 5 %}",
    "overshoot, at_most: 9 %, basis: {approximation: distant_zero, claimed: 5 %}",
    "rise_time, at_most: 3 s, basis: {approximation: dominant_pair, claimed: 1 s}",
    "final_value, within: 1, of: 1, basis: {approximation: final_value_theorem, claimed: 1}",
)
MODELS = {
    "gain": "{gain: 1}",
    "nothing": "{gain: 0}",
    "integrator": "{numerator: [1], denominator: [1, 0]}",
    "undamped": "{numerator: [1], denominator: [1, 0, 1]}",
    "undamped twice": "{numerator: [1], denominator: [1, 0, 2, 0, 1]}",
    "unstable": "{numerator: [1], denominator: [1, -1]}",
    "washout": "{numerator: [1, 0], denominator: [1, 1]}",
    "hidden": "{numerator: [1, 1], denominator: [1, 2, 1]}",
    "all poles at the origin": "{numerator: [1, 3, 1], denominator: [1, 0, 0, 0]}",
    "ramp and parabola": "{numerator: [1, 1], denominator: [1, 0, 0]}",
    "improper": "{numerator: [1, 0, 0], denominator: [1, 1]}",
    "wrong way first": "{numerator: [-1, 1], denominator: [1, 2, 1]}",
    "poles 400 decades apart": "{numerator: [1e200], denominator: [1e-200, 1, 1e200]}",
    "very quick": "{numerator: [1e-300], denominator: [1e-300, 1]}",
}


def project(model: str, signal: str, size: str) -> str:
    criteria = [
        f"  R{number}: {{text: It., criterion: {{response: l.r, measure: {m}}}}}" for number, m in enumerate(LIMITS)
    ]
    return "\n".join(
        [
            "specgate: 1",
            "project: {id: E-1, title: Edges, revision: A}",
            "subsystems:",
            f"  a: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {model}}}",
            "loops:",
            "  l:",
            "    inputs: {u: {unit: 1}, v: {unit: 1}}",
            f"    signals: {{y: {signal}}}",
            "    breaks: {b: y}",
            f"    responses: {{r: {{from: u, to: y, input: step, size: {size}}}}}",
            "requirements:",
            *criteria,
            "  L: {text: It., criterion: {loop: l, measure: damping_ratio, at_least: 0.5}}",
            "  K: {text: It., criterion: {break: l.b, measure: position_constant, at_least: 2}}",
        ]
    )


@pytest.mark.parametrize("size", ["1", "-2", "1e-30"])
@pytest.mark.parametrize("signal", ["a(u)", "a(u - y)", "v"])
@pytest.mark.parametrize("name", MODELS)
def test_every_question_is_answered_or_says_why_not(reviewed: Reviewed, name: str, signal: str, size: str) -> None:
    found = reviewed(project(MODELS[name], signal, size))
    assert read(write(found)) == found
    for requirement in found.requirements.values():
        for criterion in requirement.criteria:
            result = criterion.result
            assert result.value is not None or result.reason
            assert criterion.verdict != "open" or criterion.reason
            assert (
                result.lower is None or result.upper is None or result.lower <= float(result.value or 0) <= result.upper
            )
