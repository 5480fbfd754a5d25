"""Limits, arguments and claims against what they limit: units, per cent of what, and the wrong sign."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from specgate.terms.findings import Finding

Findings = Callable[[str], tuple[Finding, ...]]

TEXT = """
parameters:
  rated: {{value: 20 %, source: x}}
  wide: {{value: 4 m, source: x}}
subsystems:
  drive: {{input: {{unit: m}}, output: {{unit: m, span: [0 m, 6 m]}}, model: {{gain: 2, lags: [0.5 s]}}}}
  valve: {{input: {{unit: m}}, output: {{unit: "%"}}, model: {{gain: 3 %/m, lags: [0.5 s]}}}}
loops:
  axis:
    inputs: {{ask: {{unit: m}}}}
    signals: {{place: drive(ask), opening: valve(place)}}
    breaks: {{main: place}}
    responses:
      follow: {{from: ask, to: place, input: step, size: 5 mm}}
      open: {{from: ask, to: opening, input: step, size: 5 mm}}
requirements:
  R-1:
    text: It shall do.
    verification: analysis
    criterion: {{{criterion}}}
    basis: {basis}
"""

ON = {
    "place": "response: axis.follow",
    "valve": "response: axis.open",
    "break": "break: axis.main",
    "loop": "loop: axis",
}


def read(findings: Findings, on: str, criterion: str, basis: str = "computed") -> list[tuple[str, str]]:
    found = findings(TEXT.format(criterion=f"{ON[on]}, {criterion}", basis=basis))
    assert all(finding.requirement == "R-1" for finding in found)
    return [(finding.rule, finding.message) for finding in found]


@pytest.mark.parametrize(
    ("on", "criterion"),
    [
        ("place", "measure: settling_time, band: 2 %, at_most: 1.2 s"),
        ("place", "measure: settling_time, band: 1 mm, at_most: 2 min"),
        ("place", "measure: settling_time, band: 2 % of span, at_most: 1.2 s"),
        ("place", "measure: settling_time, band: 2 % of wide, at_most: 1.2 s"),
        ("place", "measure: settling_time, band: 2 % of change, at_most: 1.2 s"),
        ("valve", "measure: settling_time, band: 2 points, at_most: 1.2 s"),
        ("valve", "measure: settling_time, band: 2 % of change, at_most: 1.2 s"),
        ("valve", "measure: settling_time, band: 2 % of rated, at_most: 1.2 s"),
        ("place", "measure: rise_time, from: 5 %, to: 95 %, at_most: 1.2 s"),
        ("place", "measure: overshoot, at_most: 10 %"),
        ("place", "measure: overshoot, at_most: 3 mm"),
        ("place", "measure: overshoot, at_most: 1 % of span"),
        ("place", "measure: overshoot, at_most: 0"),
        ("valve", "measure: overshoot, at_most: 10 % of change"),
        ("valve", "measure: overshoot, at_most: 3 points"),
        ("place", "measure: final_value, within: 1 mm, of: 0 m"),
        ("place", "measure: final_value, within: 1 mm, of: 0"),
        ("place", "measure: final_value, between: [-1 mm, 5 cm]"),
        ("place", "measure: final_value, at_least: 5 mm"),
        ("place", "measure: final_value, at_most: -5 mm"),
        ("place", "measure: final_value, at_most: 0 m"),
        ("place", "measure: maximum_value, at_most: 5 mm"),
        ("place", "measure: minimum_value, at_least: -5 mm"),
        ("place", "measure: peak_deviation, at_most: 5 mm"),
        ("place", "measure: peak_deviation, at_most: 5 % of wide"),
        ("place", "measure: steady_state_error, at_most: 0.1 mm"),
        ("place", "measure: poles_at_origin, equals: 1"),
        ("break", "measure: gain_margin, at_least: 6 dB"),
        ("break", "measure: gain_margin, at_least: 2"),
        ("break", "measure: phase_margin, at_least: 45 deg"),
        ("break", "measure: phase_margin, at_least: 0.7 rad"),
        ("break", "measure: crossover_frequency, at_most: 3 Hz"),
        ("break", "measure: crossover_frequency, at_most: 20 rad/s"),
        ("break", "measure: velocity_constant, at_least: 20 1/s"),
        ("break", "measure: gain_at, frequency: 2 Hz, at_most: -20 dB"),
        ("break", "measure: loop_type, equals: 1"),
        ("loop", "measure: stable, equals: true"),
        ("loop", "measure: decay_rate, at_least: 2 1/s"),
        ("loop", "measure: natural_frequency, at_least: 0.2 Hz"),
        ("loop", "measure: damping_ratio, at_least: 0.4"),
        ("loop", "measure: damping_ratio, at_least: 40 %"),
    ],
)
def test_good_criteria_pass(findings: Findings, on: str, criterion: str) -> None:
    assert read(findings, on, criterion) == []


@pytest.mark.parametrize(
    ("on", "criterion", "message"),
    [
        ("place", "measure: settling_time, band: 2 %, at_most: 1.2 m", "settling_time is in s, this is m"),
        ("place", "measure: settling_time, band: 2 %, at_most: 1.2", "this is a plain number"),
        ("place", "measure: settling_time, band: 2 s, at_most: 1 s", "a band is in % of the change or in m"),
        ("place", "measure: settling_time, band: 0.02, at_most: 1 s", "a band is in % of the change or in m"),
        ("place", "measure: settling_time, band: 0 %, at_most: 1 s", "a band is wider than zero"),
        ("valve", "measure: settling_time, band: 2 %, at_most: 1 s", "`2 %` of what?"),
        ("valve", "measure: settling_time, band: 2 % of span, at_most: 1 s", "no `span"),
        ("place", "measure: settling_time, band: 2 % of rated, at_most: 1 s", "a band is in % of the change or in m"),
        ("place", "measure: rise_time, from: 10 mm, at_most: 1 s", "`from` is in % of the change"),
        ("place", "measure: rise_time, to: 101 %, at_most: 1 s", "from 0 to 100 %"),
        ("place", "measure: overshoot, at_most: 10 s", "overshoot is in m or % of the change, this is s"),
        ("place", "measure: overshoot, at_most: 0.1", "overshoot is in m or % of the change"),
        ("valve", "measure: overshoot, at_most: 10 %", "`10 points` for percentage points"),
        ("valve", "measure: final_value, at_least: 10 %", "`10 % of change`, `10 % of span`"),
        ("place", "measure: final_value, at_least: 10 % of change", "not measured in parts of the change"),
        ("place", "measure: final_value, at_least: 10 s", "final_value is in m, this is s"),
        ("place", "measure: final_value, at_least: 6 dB", "no ratio that could be in dB"),
        ("place", "measure: final_value, between: [5 mm, -1 mm]", "the lower limit comes first"),
        ("place", "measure: final_value, within: -1 mm, of: 0 m", "a distance is not negative"),
        ("place", "measure: final_value, equals: 3 mm", "a whole number, true or false is wanted"),
        ("place", "measure: poles_at_origin, equals: 1.5", "a whole number, true or false is wanted"),
        ("break", "measure: phase_margin, at_least: 45", "give it in deg or rad"),
        ("break", "measure: phase_margin, at_least: 45 %", "give it in deg or rad"),
        ("break", "measure: gain_margin, at_least: 6 m", "gain_margin is in"),
        ("break", "measure: crossover_frequency, at_most: 20 1/s", "radians or cycles"),
        ("break", "measure: gain_at, frequency: 2 1/s, at_most: 3 dB", "radians or cycles"),
        ("break", "measure: gain_at, frequency: 2 s, at_most: 3 dB", "rad/s is wanted"),
        ("loop", "measure: decay_rate, at_least: 2 Hz", "decay_rate is in 1/s, not in Hz"),
        ("loop", "measure: natural_frequency, at_least: 2 1/s", "radians or cycles"),
        ("loop", "measure: stable, at_least: 1", "yes or no"),
        ("loop", "measure: damping_ratio, equals: true", "yes or no is no limit"),
    ],
)
def test_what_does_not_fit_is_refused(findings: Findings, on: str, criterion: str, message: str) -> None:
    found = read(findings, on, criterion)
    assert any(message in said for _, said in found), found
    assert {rule for rule, _ in found} <= {"dimension-mismatch", "schema-violation"}


@pytest.mark.parametrize(
    ("on", "criterion", "offered"),
    [
        ("place", "measure: minimum_value, at_most: 2 mm", "peak_deviation"),
        ("place", "measure: maximum_value, at_least: -2 mm", "peak_deviation"),
        ("place", "measure: final_value, at_most: 1 mm", "within: …, of: …"),
        ("place", "measure: final_value, at_least: -1 mm", "within: …, of: …"),
        ("place", "measure: initial_value, at_most: 1 mm", "within: …, of: …"),
        ("loop", "measure: damping_ratio, at_most: 0.9", "between: […, …]"),
    ],
)
def test_a_limit_that_the_wrong_sign_would_meet(findings: Findings, on: str, criterion: str, offered: str) -> None:
    found = read(findings, on, criterion)
    assert [(rule, offered in said) for rule, said in found] == [("sign-ambiguous-limit", True)]


@pytest.mark.parametrize(
    ("criterion", "claimed", "good"),
    [
        ("measure: settling_time, band: 2 %, at_most: 1 s", "second_order_settling, claimed: 0.7 s", True),
        ("measure: settling_time, band: 2 %, at_most: 1 s", "second_order_settling, claimed: 0.7 m", False),
        ("measure: settling_time, band: 2 %, at_most: 1 s", "second_order_settling, claimed: 0.7", False),
        ("measure: overshoot, at_most: 10 %", "second_order_overshoot, claimed: 8 %", True),
        ("measure: overshoot, at_most: 10 %", "second_order_overshoot, claimed: 8 s", False),
    ],
)
def test_claims_are_in_the_unit_of_what_they_estimate(
    findings: Findings, criterion: str, claimed: str, good: bool
) -> None:
    found = read(findings, "place", criterion, f"{{approximation: {claimed}}}")
    assert [rule for rule, _ in found] == ([] if good else ["dimension-mismatch"])


def test_a_parameter_called_span_is_not_confused_with_the_span(findings: Findings) -> None:
    text = TEXT.replace("  rated:", "  span: {{value: 3 m, source: x}}\n  rated:")
    on = f"{ON['place']}, measure: peak_deviation, at_most: 5 % of span"
    found = findings(text.format(criterion=on, basis="computed"))
    assert ["or the parameter of that name" in finding.message for finding in found] == [True]
