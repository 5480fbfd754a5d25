"""Formulas put to responses that nobody has claimed anything of, on systems whose answers are known in closed form."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from textwrap import dedent

import pytest

from specgate.analysis.analyse import analyse
from specgate.compliance.thresholds import policy
from specgate.compliance.uninvited import Formula, Uninvited
from specgate.intake.load import Problems, load
from specgate.project.types import Subject
from specgate.terms.places import Place
from specgate.terms.verdicts import Trilean

PROJECT = """
    specgate: 1
    project: {{id: B-1, title: Bases, revision: A}}
    subsystems:
      block: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {model}}}
    loops:
      loop:
        inputs: {{u: {{unit: 1}}}}
        signals: {{y: block(u)}}
        responses: {{r: {{from: u, to: y, input: {drive}}}}}
    {more}
    """
STEP = "step, size: 1"
PAIR = "{numerator: [1], denominator: [1, 1, 1]}"
# The pair with a real pole at 5.5 natural frequencies: 11 decay rates.
FAR = "{numerator: [5.5], denominator: [1, 6.5, 6.5, 5.5]}"
PLACE = Place("specgate.yaml", 1, 1)
RESPONSE = Subject("response", "loop", "r", PLACE)
ASKED = """
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {response: loop.r, measure: settling_time, band: 5 %, at_most: 1 min}
    """


@pytest.fixture
def put(tmp_path: Path) -> Callable[..., Uninvited]:
    def make(model: str, drive: str = STEP, more: str = "") -> Uninvited:
        path = tmp_path / "specgate.yaml"
        path.write_text(dedent(PROJECT.format(model=model, drive=drive, more="")) + dedent(more))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        analyses = analyse(project)
        return Uninvited(project, analyses, policy(project, analyses.nominal.values))

    return make


def only(found: Uninvited, name: str, measure: str, variant: str | None = None) -> Formula:
    (one,) = (
        each
        for each in found.of(RESPONSE).rows
        if (each.row.name, each.question.measure.name, each.row.variant) == (name, measure, variant)
    )
    return one


def relative(one: Formula) -> float:
    assert one.error is not None
    assert one.error.relative is not None
    return float(one.error.relative.enclose(64))


def test_the_pair_alone_is_met_by_its_own_formulas_exactly(put: Callable[..., Uninvited]) -> None:
    found = put(PAIR)
    for name, measure in (
        ("second_order_overshoot", "overshoot"),
        ("second_order_peak_time", "peak_time"),
        ("second_order_rise_full", "rise_time"),
    ):
        one = only(found, name, measure)
        assert one.applies is Trilean.YES
        assert one.failing == ()
        assert one.accuracy is not None
        assert abs(relative(one)) < 1e-15


def test_four_over_sigma_is_off_by_what_the_pair_is(put: Callable[..., Uninvited]) -> None:
    # zeta = 0.5: |y - 1| has its extremes at k pi/omega; into 2 % for good at 8.0759 s (root of the envelope's cosine).
    one = only(put(PAIR), "second_order_settling", "settling_time")
    assert one.value.exact == 8
    settles = 8 / (1 + relative(one))
    wave = math.exp(-settles / 2) * (
        math.cos(math.sqrt(0.75) * settles) + math.sin(math.sqrt(0.75) * settles) / math.sqrt(3)
    )
    assert abs(wave) == pytest.approx(0.02, abs=1e-12)
    assert one.error is not None
    assert one.error.side == "unsafe"


@pytest.mark.parametrize(("pole", "applies"), [("5.000001", Trilean.YES), ("4.999999", Trilean.NO)])
def test_a_pole_on_either_side_of_what_is_allowed(put: Callable[..., Uninvited], pole: str, applies: Trilean) -> None:
    model = f"{{poles: [{{real: -1 1/s, imaginary: 1 1/s}}, -{pole} 1/s], zeros: [], leading_coefficient: 1}}"
    one = only(put(model), "second_order_settling", "settling_time")
    assert one.applies is applies
    assert [each.condition.key for each in one.failing] == ([] if applies is Trilean.YES else ["separation"])


def test_what_fails_is_named_and_the_error_told_all_the_same(put: Callable[..., Uninvited]) -> None:
    one = only(put(FAR), "second_order_delay", "delay_time", "linear")
    assert one.applies is Trilean.NO
    assert [each.condition.key for each in one.failing] == ["alone"]
    assert one.error is not None
    assert one.accuracy is None


def test_the_questions_are_those_of_the_requirements(put: Callable[..., Uninvited]) -> None:
    one = only(put(PAIR, more=ASKED), "second_order_settling", "settling_time")
    assert one.question.said == {"band": "5 % of the change"}
    assert one.value.exact == 6
    assert one.question.unit is not None
    assert one.question.unit.symbol == "min"


def test_a_formula_for_another_question_is_left_out(put: Callable[..., Uninvited]) -> None:
    counted = [
        (one.row.name, one.question.arguments.upper)
        for one in put(PAIR).of(RESPONSE).rows
        if one.question.measure.name == "rise_time"
    ]
    assert [upper for name, upper in counted if name == "second_order_rise_full"] == [1]
    assert all(upper < 1 for name, upper in counted if name != "second_order_rise_full")
    assert sum(name == "second_order_rise" for name, _ in counted) == 5


def test_the_final_value_theorem_tells_a_number_that_there_is_none_of(put: Callable[..., Uninvited]) -> None:
    found = put("{numerator: [1], denominator: [1, -1]}")
    (one,) = found.of(RESPONSE).rows
    assert one.row.name == "final_value_theorem"
    assert one.applies is Trilean.NO
    assert one.value.exact == -1
    assert one.error is None
    assert one.truth.settled.absent is not None
    assert {"settling_time", "overshoot"} <= set(dict(found.of(RESPONSE).absent))


def test_the_threshold_of_the_project_counts(put: Callable[..., Uninvited]) -> None:
    more = "\n    approximations: {dominant_pair: {separation: 20}}\n"
    assert only(put(FAR), "second_order_settling", "settling_time").applies is Trilean.YES
    one = only(put(FAR, more=more), "second_order_settling", "settling_time")
    assert one.applies is Trilean.NO
    assert one.failing[0].policy is not None


def test_inputs_that_no_formula_is_for(put: Callable[..., Uninvited]) -> None:
    found = put(PAIR, "impulse, area: 1 s").of(RESPONSE)
    assert found.rows == ()
    assert found.absent == ()
    assert found.reason is not None
    assert put(PAIR).of(RESPONSE).reason is None


def test_of_a_bandwidth_more_is_the_unsafe_promise(put: Callable[..., Uninvited]) -> None:
    one = only(put(FAR), "bandwidth_from_pair", "bandwidth", "half_power")
    assert one.error is not None
    assert (relative(one) > 0) == (one.error.side == "unsafe")


CLOSED = """
    specgate: 1
    project: {id: B-2, title: Breaks, revision: A}
    subsystems:
      block: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [2], denominator: [1, 2, 0]}}
    loops:
      loop:
        inputs: {u: {unit: 1}}
        signals: {y: block(u - y)}
        breaks: {b: y}
        responses: {r: {from: u, to: y, input: ramp, slope: 1 1/s}}
    """


@pytest.fixture
def closed(tmp_path: Path) -> Uninvited:
    path = tmp_path / "specgate.yaml"
    path.write_text(dedent(CLOSED))
    project = load(path)
    assert not isinstance(project, Problems)
    analyses = analyse(project)
    return Uninvited(project, analyses, policy(project, analyses.nominal.values))


def test_a_break_is_asked_for_its_margins(closed: Uninvited) -> None:
    # L = 2/(s(s + 2)): |S|^2 = (x^2 + 4x)/(x^2 + 4), x = w^2, is greatest at x = 1 + sqrt 5: the golden ratio.
    found = closed.of(Subject("break", "loop", "b", PLACE))
    (one,) = (
        each
        for each in found.rows
        if (each.row.name, each.question.measure.name) == ("margins_from_sensitivity", "phase_margin")
    )
    peak = math.sqrt((1 + math.sqrt(5)) / 2)
    assert float(one.value.enclose(64)) == pytest.approx(2 * math.asin(1 / (2 * peak)))
    assert one.applies is Trilean.YES
    assert one.error is not None
    assert one.error.side == "safe"
    assert relative(one) < 0
    assert dict(found.absent)["gain_margin"]


def test_the_error_of_a_ramp_has_a_formula_of_its_own(closed: Uninvited) -> None:
    # Kv = 1 1/s: a ramp of 1 1/s is followed 1 behind.
    found = closed.of(RESPONSE)
    exact = [one for one in found.rows if one.row.name == "static_error_constants"]
    assert [one.value.exact for one in exact] == [1]
    assert [one.error.side for one in exact if one.error is not None] == ["none"]
