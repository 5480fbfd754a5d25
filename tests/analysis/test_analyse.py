"""Loops as analysed: one solution each, subjects of what is declared, and why something is missing."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from textwrap import dedent

import pytest
from flint import fmpq

from specgate.analysis.analyse import analyse
from specgate.analysis.analyses import Analyses, Missing
from specgate.analysis.arguments import said
from specgate.analysis.reads import literals, parameters_read
from specgate.intake.load import Problems, load
from specgate.measures.subjects import BreakSubject, ResponseSubject
from specgate.project.types import Project
from specgate.response.answers import Absent

Read = Callable[[str], Project]


@pytest.fixture
def read(tmp_path: Path) -> Read:
    def reader(text: str) -> Project:
        path = tmp_path / "specgate.yaml"
        path.write_text(dedent(text))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return project

    return reader


HOIST = """
    specgate: 1
    project: {id: L-1, title: Lift table, revision: A}
    parameters: {slope: {formula: 2 * rate}, rate: 3 V/m}
    subsystems:
      regulator:
        input: {unit: m}
        output: {unit: V}
        model: {pid: {form: parallel, proportional: slope, integral: 1 V/m/s}}
      drive:
        input: {unit: V}
        output: {unit: m}
        parameters: {gain: 0.5 m/s/V}
        model: {numerator: [gain], denominator: [1, 0 1/s]}
      spare: {input: {unit: 1}, output: {unit: 1}, model: {gain: 1}}
    loops:
      lift:
        inputs: {demand: {unit: m}, load: {unit: V}}
        signals:
          effort: regulator(demand - height)
          height: drive(effort + load)
          goal: 2 * demand
        breaks: {main: height}
        responses:
          follow: {from: demand, to: height, input: step, size: 20 mm}
          against_goal: {from: demand, to: height, input: step, size: 20 mm, reference: goal}
          against_nothing: {from: load, to: height, input: step, size: 1 V, reference: 0}
          against_demand: {from: load, to: height, input: step, size: 1 V, reference: demand}
          plain: {from: load, to: height, input: step, size: 1 V}
          ramped: {from: demand, to: height, input: ramp, slope: 1 mm/s}
    """


def final_error(analyses: Analyses, response: str) -> fmpq | None:
    subject = analyses.loops["lift"].responses[response].subject
    assert isinstance(subject, ResponseSubject)
    return None if isinstance(subject.error, Absent) else subject.error.final_value().exact


def test_the_error_is_reference_less_signal(read: Read) -> None:
    analyses = analyse(read(HOIST.replace("integral: 1 V/m/s", "integral: 0 V/m/s")))
    # y = r exactly in the end; a load of 1 V leaves 1/6 m (6 V/m against 1 V, the drive integrates)
    assert final_error(analyses, "follow") == 0
    assert final_error(analyses, "against_goal") == fmpq(1, 50)
    assert final_error(analyses, "against_nothing") == final_error(analyses, "against_demand") == fmpq(-1, 6)
    assert final_error(analyses, "plain") is None


def test_what_is_wired_and_what_is_missing(read: Read) -> None:
    loop = analyse(read(HOIST)).loops["lift"]
    assert loop.subsystems == ("regulator", "drive")
    assert isinstance(loop.breaks["main"].subject, BreakSubject)
    ramped = loop.responses["ramped"].subject
    assert isinstance(ramped, ResponseSubject)
    assert ramped.kind == "ramp"
    assert ramped.beyond == "the input is ramp"
    assert loop.responses["follow"].unit.symbol == "m"


def test_a_loop_without_pi_is_computed_once(read: Read) -> None:
    analyses = analyse(read(HOIST))
    assert analyses.again.loops["lift"] is analyses.nominal.loops["lift"]


@pytest.mark.parametrize(
    ("old", "new"),
    [
        ("integral: 1 V/m/s", "integral: pi * 1 V/m/s"),
        ("size: 20 mm}", "size: pi * 1 mm}"),
        ("goal: 2 * demand", "goal: pi * demand"),
    ],
)
def test_a_loop_with_pi_is_computed_twice(read: Read, old: str, new: str) -> None:
    analyses = analyse(read(HOIST.replace(old, new)))
    assert analyses.again.loops["lift"] is not analyses.nominal.loops["lift"]
    assert analyses.again.pi > analyses.nominal.pi


def test_what_a_model_reads(read: Read) -> None:
    project = read(HOIST)
    values = analyse(project).nominal.values
    assert parameters_read(project.subsystems["regulator"], values) == ("slope", "rate")
    assert parameters_read(project.subsystems["drive"], values) == ("drive.gain",)
    assert [value.as_written for value in literals(project.subsystems["regulator"])] == ["1 V/m/s"]
    assert literals(project.subsystems["drive"]) == ()


CANCELLING = """
    specgate: 1
    project: {{id: L-2, title: Cancelling, revision: A}}
    subsystems:
      trim: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1, {zero}], denominator: [1, 5]}}}}
      body: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [3], denominator: [1, {pole}]}}}}
    loops:
      level:
        inputs: {{order: {{unit: 1}}}}
        signals: {{height: body(trim(order - height))}}
        responses: {{lift: {{from: order, to: height, input: step, size: 1}}}}
    """


@pytest.mark.parametrize(("zero", "pole", "void"), [("-1", "-1", True), ("0", "0", True), ("1", "1", False)])
def test_a_hidden_mode_that_does_not_decay_voids_the_response(read: Read, zero: str, pole: str, void: bool) -> None:
    subject = analyse(read(CANCELLING.format(zero=zero, pole=pole))).loops["level"].responses["lift"].subject
    assert isinstance(subject, ResponseSubject)
    assert (subject.void is not None) is void
    assert subject.void is None or subject.void.proved


def test_an_improper_response_is_undecided_and_says_why(read: Read) -> None:
    text = CANCELLING.format(zero="1", pole="2").replace("denominator: [1, 5]", "denominator: [5]")
    text = text.replace("body(trim(order - height))", "trim(order)")
    response = analyse(read(text)).loops["level"].responses["lift"]
    assert response.improper
    assert isinstance(response.subject, Missing)
    assert not response.subject.proved
    assert "a step has no response through an ideal derivative" in response.subject.reason


def test_an_algebraic_loop_leaves_its_responses_open(read: Read) -> None:
    text = CANCELLING.format(zero="5", pole="2").replace("denominator: [1, 2]", "denominator: [-3]")
    loop = analyse(read(text)).loops["level"]
    assert loop.solution.algebraic_loop is not None
    subject = loop.responses["lift"].subject
    assert isinstance(subject, Missing)
    assert not subject.proved
    assert not subject.later


def test_arguments_in_words(read: Read) -> None:
    project = read(
        HOIST
        + """
    requirements:
      R:
        text: It shall.
        criteria:
          - {response: lift.follow, measure: settling_time, band: 2 %, at_most: 9 s}
          - {response: lift.follow, measure: settling_time, band: 2 % of change, at_most: 9 s}
          - {response: lift.follow, measure: settling_time, band: 1 mm, at_most: 9 s}
          - {response: lift.follow, measure: rise_time, to: 95 %, at_most: 9 s}
    """
    )
    assert [said(one) for one in project.requirements["R"].criteria] == [
        {"band": "2 % of the change"},
        {"band": "2 % of change"},
        {"band": "1 mm"},
        {"from": "10 % of the change", "to": "95 % of the change"},
    ]
