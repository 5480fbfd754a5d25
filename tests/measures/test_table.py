"""The measure table against the format: every name of it is a row, and says what it is."""

from __future__ import annotations

from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.measures.table import MEASURES
from specgate.measures.text import describe
from specgate.review.build import review

ANSWERED = {
    "response": """
        final_value initial_value maximum_value minimum_value value_at peak_deviation overshoot undershoot
        settling_time rise_time delay_time peak_time steady_state_error poles_at_origin zeros_at_origin
        bandwidth resonance_peak gain_at phase_at
        deviation_after within_mask peak_rate integral_absolute_error integral_squared_error
        steady_state_amplitude steady_state_phase standard_deviation
    """,
    "break": """
        loop_type position_constant velocity_constant acceleration_constant
        gain_margin gain_margin_up gain_margin_down phase_margin phase_margin_lag phase_margin_lead delay_margin
        least_distance sensitivity_peak crossover_frequency phase_crossover_frequency gain_at phase_at peak_gain
    """,
    "loop": "stable hidden_modes damping_ratio natural_frequency decay_rate",
}
ON_EVERY_STEP = """
    final_value initial_value maximum_value minimum_value peak_deviation overshoot undershoot settling_time rise_time
    delay_time peak_time steady_state_error poles_at_origin zeros_at_origin
"""


def test_every_measure_of_the_format_is_a_row() -> None:
    for kind, names in ANSWERED.items():
        for name in names.split():
            assert kind in MEASURES[name].subjects, name
            assert MEASURES[name].read is not None, name
    assert set(MEASURES) == {name for names in ANSWERED.values() for name in names.split()}


def test_rows_are_filed_under_their_names() -> None:
    assert all(name == row.name for name, row in MEASURES.items())


def test_what_is_reported_on_every_step_response() -> None:
    assert [row.name for row in MEASURES.values() if row.always and "response" in row.subjects] == ON_EVERY_STEP.split()


def test_signed_measures_are_marked() -> None:
    signed = {name for name, row in MEASURES.items() if row.signed}
    assert {"final_value", "initial_value", "maximum_value", "minimum_value", "value_at"} <= signed
    assert not signed & {"peak_deviation", "overshoot", "undershoot", "settling_time", "steady_state_error"}


def test_required_arguments() -> None:
    required = {name: [a.name for a in row.arguments if a.required] for name, row in MEASURES.items()}
    assert required["settling_time"] == ["band"]
    assert required["value_at"] == ["time"]
    assert required["rise_time"] == []
    assert [argument.name for argument in MEASURES["rise_time"].arguments] == ["from", "to"]


def test_every_row_is_explained() -> None:
    for name, row in MEASURES.items():
        explained = describe(name)
        assert explained.title == row.title
        assert row.definition in explained.text
        assert row.absent_when in explained.text
        assert explained.source
        assert ("does not answer it yet" in explained.text) is (row.read is None)


def test_terms_of_the_standard_are_named() -> None:
    """Numbers of IEC 60050-351:2013."""
    numbers = {"settling_time": "351-45-37", "overshoot": "351-45-38", "damping_ratio": "351-45-19"}
    for name, number in {**numbers, "phase_margin": "351-46-05", "gain_margin": "351-46-07"}.items():
        assert number in describe(name).source


@pytest.mark.parametrize("name", list(MEASURES))
def test_every_text_says_what_may_limit_it_and_what_happens_at_the_limit(name: str) -> None:
    row, said = MEASURES[name], describe(name).text
    assert said.count("\n\nLimits: ") == 1
    assert ("equals" in said.partition("Limits: ")[2].partition(".")[0]) is (
        row.unit.value in ("whole number", "yes/no")
    )
    assert ("At its limit: " in said) is (row.unit.value not in ("whole number", "yes/no"))
    assert ("exact predicate" in said) is (row.at_limit is not None)
    assert ("wrong sign" in said) is row.sided
    assert ("asked for or not" in said) is row.always


def test_the_masks_of_the_example_are_read_as_they_are_written(tmp_path: Path) -> None:
    around = """
specgate: 1
project: {id: T-1, title: Test, revision: A}
subsystems: {winch: {input: {unit: m}, output: {unit: m}, model: {gain: 1 1/s, integrators: 1}}}
loops:
  hoist:
    inputs: {demand: {unit: m}}
    signals: {opening: winch(demand - opening)}
    breaks: {main: opening}
    responses: {follow: {from: demand, to: opening, input: step, size: 1 m}}
"""
    example = MEASURES["within_mask"].example
    assert "\n".join(f"  {line}" for line in example.strip().splitlines()) in describe("within_mask").text
    path = tmp_path / "specgate.yaml"
    path.write_text(around + example)
    project = load(path)
    assert not isinstance(project, Problems), [one.message for one in project.findings]
    found = [criterion.result for criterion in review(project).requirements["R-1"].criteria]
    assert [one.value for one in found] == [False, False]
