"""Wires, ranges, rest and inputs: what fits and what does not."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.project.instantiate import signal_unit, span, values
from specgate.project.types import Project
from specgate.terms.findings import Finding

ProjectOf = Callable[[str], Project]
Findings = Callable[[str], tuple[Finding, ...]]

TEXT = """
parameters:
  reach: {{value: 40 mm, source: x}}
subsystems:
  pump:
    input: {{unit: mA}}
    output: {{unit: l/min, span: [5 l/min, 60 l/min]}}
    model: {{gain: 3 l/min/A}}
  tank:
    input: {{unit: m3/h}}
    output: {{unit: mm, linear_range: [0, {high}]}}
    model: {{gain: 2 1/m2, integrators: 1}}
  spinner: {{input: {{unit: Hz}}, output: {{unit: 1/s}}, model: {{gain: 1 s/rev * 1 1/s}}}}
loops:
  level:
    inputs: {{ask: {{unit: cm}}, draw: {{unit: l/h}}, pace: {{unit: 1/s}}}}
    signals:
      flow: pump(drive) - draw
      height: tank(flow)
      error: ask - height
      drive: 2 A/m * error
{signals}
    rest: {{{rest}}}
    responses:
      follow: {{from: ask, to: height, input: step, size: 5 mm}}
{responses}
"""


def text(signals: str = "", rest: str = "height: 30 mm", responses: str = "", high: str = "reach") -> str:
    rows = "".join(f"      {row}\n" for row in signals.split("; ") if row)
    more = "".join(f"      {row}\n" for row in responses.split("; ") if row)
    return TEXT.format(signals=rows, rest=rest, responses=more, high=high)


def test_the_declared_unit_of_each_signal(project: ProjectOf) -> None:
    made = project(
        text("sum: 3*error + height; back: 50 % * draw; speed: (2 mm/s)/(1 mm)*height; round: sum + flow*(1 s/m2)")
    )
    units = {name: signal_unit(made, "level", name).symbol for name in made.loops["level"].signals}
    assert units == {
        "flow": "l/min",
        "height": "mm",
        "error": "cm",
        "drive": "mA",
        "sum": "cm",
        "back": "l/h",
        "speed": "m/s",
        "round": "cm",
    }
    assert signal_unit(made, "level", "ask").symbol == "cm"


def test_the_span_is_that_of_the_port_that_gives_the_signal(project: ProjectOf) -> None:
    made = project(text("twice: 2*flow"))
    known = values(made)
    assert span(made, "level", "flow", known) == fmpq(55, 60000)
    assert span(made, "level", "height", known) is None
    assert span(made, "level", "ask", known) is None


def test_a_span_of_temperatures_counts_degrees(project: ProjectOf) -> None:
    oven = "oven: {input: {unit: W}, output: {unit: degC, span: [0 degC, 283.15 K]}, model: {gain: 2 K/W}}"
    loop = "loops: {heat: {inputs: {power: {unit: W}}, signals: {warmth: oven(power)}}}"
    made = project(f"subsystems: {{{oven}}}\n{loop}")
    assert span(made, "heat", "warmth", values(made)) == 10


def test_signals_in_a_circle_of_sums_find_their_unit(project: ProjectOf) -> None:
    made = project(text("one: two - 2*three; two: three; three: one + height"))
    assert {signal_unit(made, "level", name).symbol for name in ("one", "two", "three")} == {"mm"}


@pytest.mark.parametrize(
    ("signals", "message"),
    [
        ("odd: height + flow", "a signal in `l/min` is added to one in `mm`"),
        ("odd: height - 1 s * height", "is added to one in `mm`"),
        ("odd: pump(height)", "`pump` takes `mA` and is given `mm`"),
        ("odd: pump(drive + height)", "a signal in `mm` is added to one in `mA`"),
        ("odd: spinner(pace)", "a factor of 2π is in doubt"),
        ("one: two; two: one", "the unit of `one` cannot be told"),
        ("odd: 2*(height + 3*flow)", "a signal in `l/min` is added to one in `mm`"),
    ],
)
def test_what_cannot_be_wired_is_refused(findings: Findings, signals: str, message: str) -> None:
    found = findings(text(signals))
    assert message in found[0].message, [finding.message for finding in found]
    assert {finding.rule for finding in found} == {"dimension-mismatch"}
    assert {finding.loop for finding in found} == {"level"}
    assert found[0].place.line == 24


def test_all_wrong_wires_are_said(findings: Findings) -> None:
    found = findings(text("odd: height + flow; other: pump(height)"))
    assert [finding.place.line for finding in found] == [24, 25]


@pytest.mark.parametrize(
    ("rest", "message"),
    [
        ("height: 3 s", "m is wanted, this is s"),
        ("height: 3", "this is a plain number"),
        ("height: 3 dB", "m is wanted"),
    ],
)
def test_rest_is_in_the_unit_of_the_signal(findings: Findings, rest: str, message: str) -> None:
    assert [message in finding.message for finding in findings(text(rest=rest))] == [True]


@pytest.mark.parametrize(
    ("high", "message"), [("2 s", "m is wanted"), ("0 mm", "is empty"), ("-3 mm", "is empty"), ("reach/0", "division")]
)
def test_a_range_is_in_the_unit_of_its_port(findings: Findings, high: str, message: str) -> None:
    found = findings(text(high=high))
    assert [message in finding.message for finding in found] == [True]
    assert found[0].subsystem == "tank"


OVEN = """
subsystems:
  oven:
    input: {{unit: W}}
    output: {{unit: {unit}, linear_range: [{low}, {high}]}}
    model: {{gain: 2 K/W}}
"""


def test_a_range_of_temperatures_is_absolute(findings: Findings) -> None:
    assert not findings(OVEN.format(unit="K", low="300 K", high="30 degC"))
    assert "is empty" in findings(OVEN.format(unit="K", low="300 K", high="20 degC"))[0].message
    assert not findings(OVEN.format(unit="degC", low="-20 degC", high="300 K"))


def test_a_signal_is_not_in_decibels(findings: Findings) -> None:
    found = findings("subsystems: {a: {input: {unit: V}, output: {unit: dB}, model: {gain: 2}}}")
    assert any("cannot be in dB" in finding.message for finding in found)


@pytest.mark.parametrize(
    ("response", "message"),
    [
        ("a: {from: ask, to: height, input: step, size: 5 s}", "m is wanted, this is s"),
        ("a: {from: ask, to: height, input: step, size: 5}", "this is a plain number"),
        ("a: {from: ask, to: height, input: step, size: 0 mm}", "drives nothing"),
        ("a: {from: ask, to: height, input: step, size: reach - 4 cm}", "drives nothing"),
        ("a: {from: ask, to: height, input: ramp, slope: 5 mm}", "m/s is wanted"),
        ("a: {from: ask, to: height, input: impulse, area: 5 mm}", "m*s is wanted"),
        ("a: {from: ask, to: height, input: parabola, curvature: 5 mm/s}", "cm/s^2 is wanted"),
        ("a: {from: ask, to: height, input: pulse, size: 5 mm, duration: 3 mm}", "s is wanted, this is m"),
        ("a: {from: ask, to: height, input: sine, amplitude: 5 mm, frequency: 3 1/s}", "radians or cycles"),
        ("a: {from: ask, to: height, input: white_noise, density: 3 mm2}", "m^2*s is wanted"),
    ],
)
def test_inputs_are_in_units_that_fit(findings: Findings, response: str, message: str) -> None:
    found = findings(text(responses=response))
    assert [message in finding.message for finding in found] == [True], [finding.message for finding in found]
    assert found[0].response == "a"


def test_a_step_of_a_signal_in_per_cent_says_per_cent_of_what(findings: Findings) -> None:
    valve = """
subsystems: {{valve: {{input: {{unit: "%"}}, output: {{unit: "%"}}, model: {{gain: 1, lags: [2 s]}}}}}}
loops:
  flow:
    inputs: {{ask: {{unit: "%"}}}}
    signals: {{opening: valve(ask)}}
    rest: {{opening: 40 %, ask: 40 %}}
    responses: {{open: {{from: ask, to: opening, input: step, size: {size}}}}}
"""
    assert not findings(valve.format(size="5 points"))
    assert ["`5 %` of what?" in finding.message for finding in findings(valve.format(size="5 %"))] == [True]


def test_good_inputs_pass(findings: Findings) -> None:
    good = (
        "a: {from: ask, to: height, input: ramp, slope: 5 mm/min}; "
        "b: {from: ask, to: height, input: sine, amplitude: reach, frequency: 3 Hz}; "
        "c: {from: ask, to: height, input: white_noise, density: 3 mm2/Hz}; "
        "d: {from: ask, to: height, input: ramp_and_hold, size: 5 mm, slope: 1 mm/s}"
    )
    assert not findings(text(responses=good))


def test_many_signals_in_a_row_are_quick(findings: Findings) -> None:
    rows = "; ".join(f"n{i}: n{i + 1} + n{i + 2}" for i in range(400))
    assert not findings(text(f"{rows}; n400: height; n401: height"))
