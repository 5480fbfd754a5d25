"""The whole line as a function: same bytes for the same input, laws that any project keeps, the gate in words."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import unusable
from specgate.review.types import MeasureResult, Review

Reviewed = Callable[[str], Review]
TESTS = Path(__file__).resolve().parents[1]

PROJECT = """
    specgate: 1
    project: {{id: V-1, title: Review, revision: A}}
    parameters: {{slow: {slow}, quick: {quick}, size: {size}}}
    subsystems:
      flap:
        input: {{unit: V}}
        output: {{unit: mm}}
        model: {{gain: 3 mm/V, lags: [slow], pairs: [{{natural_frequency: 1/quick, damping: 0.4}}]}}
    loops:
      duct:
        inputs: {{order: {{unit: V}}}}
        signals: {{opening: flap(order)}}
        responses: {{open: {{from: order, to: opening, input: step, size: size}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: duct.open, measure: settling_time, band: 2 %, at_most: {limit}}}
    {more}
    """


def measures(found: Review) -> dict[str, MeasureResult]:
    return {one.measure: one for one in found.loops["duct"].responses["open"].measures}


def project(slow: str = "0.3 s", quick: str = "0.1 s", size: str = "2 V", limit: str = "2 s", more: str = "") -> str:
    return PROJECT.format(slow=slow, quick=quick, size=size, limit=limit, more=more)


TIMES = ("settling_time", "rise_time", "delay_time", "peak_time")
RATIOS = ("overshoot", "undershoot")
VALUES = ("final_value", "maximum_value", "minimum_value", "peak_deviation")


def test_all_times_scale_with_the_time_constants(reviewed: Reviewed) -> None:
    one, other = measures(reviewed(project())), measures(reviewed(project(slow="3 s", quick="1 s", limit="20 s")))
    for name in (*TIMES, *RATIOS, *VALUES):
        first, second = one[name].value, other[name].value
        factor = 10 if name in TIMES else 1
        assert first is None or second == pytest.approx(factor * first, rel=1e-11, abs=1e-13), name


def test_all_values_scale_with_the_size_of_the_step(reviewed: Reviewed) -> None:
    one, other = measures(reviewed(project())), measures(reviewed(project(size="-6 V")))
    extremes = {"maximum_value": "minimum_value", "minimum_value": "maximum_value"}
    for name in (*TIMES, *RATIOS):
        assert one[name].value == other[name].value, name
    for name in ("final_value", "maximum_value", "minimum_value"):
        assert other[extremes.get(name, name)].value == pytest.approx(-3 * float(one[name].value or 0)), name


def test_the_order_of_keys_changes_nothing_but_places(reviewed: Reviewed) -> None:
    text = project()
    turned = text.replace("slow: 0.3 s, quick: 0.1 s, size: 2 V", "size: 2 V, quick: 0.1 s, slow: 0.3 s")
    assert turned != text
    one, other = reviewed(text), reviewed(turned)
    assert one.loops == other.loops
    assert one.requirements["R"].criteria[0].result == other.requirements["R"].criteria[0].result


@pytest.mark.parametrize(
    ("limit", "policy", "outcome", "reasons"),
    [
        ("2 s", "", "pass", ()),
        (
            "1 s",
            "",
            "hold",
            ("R is not met: settling_time of duct.open is 1.185 s, and at most 1 s is required",),
        ),
        ("1 s", "gate: {hold_on: [open]}", "pass", ()),
    ],
)
def test_the_gate(reviewed: Reviewed, limit: str, policy: str, outcome: str, reasons: tuple[str, ...]) -> None:
    found = reviewed(project(limit=limit, more=policy))
    assert (found.gate.outcome, found.gate.reasons) == (outcome, reasons)


def test_an_error_that_restates_nothing_holds_the_gate_whatever_the_policy_names(reviewed: Reviewed) -> None:
    text = project(more="gate: {hold_on: []}").replace("text: It shall.", "text: It shall.\n        derived_from: [N]")
    found = reviewed(text)
    assert found.requirements["R"].verdict == "compliant"
    assert found.gate.outcome == "hold"
    assert found.gate.reasons[0].startswith("R: N in derived_from is no requirement of this project")


def test_a_project_that_cannot_be_built() -> None:
    path = sorted((TESTS / "broken").glob("*.yaml"))[0]
    problems = load(path)
    assert isinstance(problems, Problems)
    found = unusable(problems)
    assert found.gate.outcome == "unusable"
    assert len(found.findings) == len(problems.findings) > 0
    assert all(one.level == "error" for one in found.findings)


CHECK = """
import sys
from pathlib import Path
from specgate.exchange.json import write
from specgate.intake.load import load
from specgate.review.build import review
sys.stdout.write(write(review(load(Path(sys.argv[1])))))
unwanted = {"scipy", "jinja2", "weasyprint", "pint"} & set(sys.modules)
assert not unwanted, unwanted
"""


@pytest.mark.parametrize("folder", ["survey_airship/rev_a"])
def test_the_same_bytes_whatever_the_hash_seed_and_without_slow_libraries(folder: str) -> None:
    path = TESTS.parent / "example_projects" / folder
    outputs = [
        subprocess.run(
            [sys.executable, "-W", "error", "-c", CHECK, str(path)],
            capture_output=True,
            check=True,
            env={**os.environ, "PYTHONHASHSEED": seed},
        ).stdout
        for seed in ("1", "2")
    ]
    assert outputs[0] == outputs[1]
    assert str(TESTS.parent).encode() not in outputs[0]
