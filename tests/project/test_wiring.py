"""Loops with values: instances, signals as sums, what a dead time leaves unanswered, rest."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq, fmpq_poly

from specgate.project.instantiate import PRECISE_PI, InstantiatedLoop, instantiate, values
from specgate.project.types import Project
from specgate.systems.blocks import LinearForm, OutputRef, SignalRef
from specgate.systems.delay_cut import has_dead_time
from specgate.systems.delayed import solve_delayed
from specgate.systems.solution import solve
from specgate.terms.findings import Finding

ProjectOf = Callable[[str], Project]
Findings = Callable[[str], tuple[Finding, ...]]

BLOCKS = """
subsystems:
  winder: {{input: {{unit: V}}, output: {{unit: m/s}}, model: {{gain: 2 m/s/V, lags: [0.5 s] {winder}}}}}
  dancer: {{input: {{unit: m/s}}, output: {{unit: mm}}, model: {{gain: 1000 mm/m, integrators: 1}} {dancer}}}
  trim:   {{input: {{unit: mm}}, output: {{unit: V}}, model: {{gain: 0.03 V/mm}}}}
  readout: {{input: {{unit: m}}, output: {{unit: m}}, model: {{gain: 1, lags: [1 s] {readout}}}}}
loops:
  tension:
    inputs: {{ask: {{unit: mm}}, slack: {{unit: mm/s}}}}
    signals:
{signals}
    responses:
      follow: {{from: ask, to: place, input: step, size: 5 mm}}
      shown:  {{from: ask, to: shown, input: step, size: 5 mm}}
      upset:  {{from: slack, to: speed, input: step, size: 5 mm/s}}
    breaks: {{main: place, outside: shown}}
    {rest}
"""
SIGNALS = """
      volt:  trim(ask - place)
      speed: winder(volt) + slack
      place: dancer(speed)
      shown: readout(place)
"""


def text(signals: str = SIGNALS, winder: str = "", dancer: str = "", readout: str = "", rest: str = "") -> str:
    return BLOCKS.format(signals=signals, winder=winder, dancer=dancer, readout=readout, rest=rest)


def loop(project: Project) -> InstantiatedLoop:
    return instantiate(project, values(project))["tension"]


def instances(made: InstantiatedLoop) -> list[str]:
    return [instance.name for instance in made.wiring.instances]


def test_a_loop_in_coherent_si(project: ProjectOf) -> None:
    made = loop(project(text()))
    assert made.wiring.inputs == ("ask", "slack")
    assert instances(made) == ["winder", "dancer", "trim", "readout"]
    assert made.wiring.signals["speed"] == LinearForm(
        ((fmpq(1), OutputRef("winder", "output")), (fmpq(1), SignalRef("slack")))
    )
    trim = made.wiring.instances[2]
    assert trim.arguments["input"] == LinearForm(((fmpq(1), SignalRef("ask")), (fmpq(-1), SignalRef("place"))))
    # det P = s (0.5 s + 1) (s + 1) closed by 0.03 V/mm * 2 m/s/V = 60 1/s
    assert solve(made.wiring).determinant == fmpq_poly([60, 61, fmpq(3, 2), fmpq(1, 2)]) / fmpq(1, 2)
    assert not made.depends_on_pi
    assert (made.unsupported, made.responses, made.breaks) == (None, {}, {})


def test_the_order_of_lines_does_not_matter(project: ProjectOf) -> None:
    lines = SIGNALS.strip("\n").split("\n")
    other = loop(project(text("\n".join(reversed(lines)))))
    assert solve(other.wiring).determinant == solve(loop(project(text())).wiring).determinant


SPELLED = [
    # a call inside a call, and the same call written twice
    """
      place: dancer(winder(trim(ask - place)) + slack)
      volt:  trim(ask - place)
      speed: winder(trim(ask - place)) + slack
      shown: readout(place)
""",
    # the same argument by name and spelled out, in another order
    """
      error: ask - place
      volt:  trim(error)
      again: trim(-place + ask)
      speed: slack + winder(volt)
      other: winder(again)
      place: dancer(speed)
      shown: readout(place)
""",
    # a detour that cancels
    """
      error: ask - place + 2*slack*(1 s) - slack*(2 s)
      volt:  trim(error)
      third: trim((ask - place)/3*3)
      speed: slack + winder(volt)
      place: dancer(speed)
      shown: readout(place)
""",
]


@pytest.mark.parametrize("signals", SPELLED)
def test_the_same_argument_is_the_same_instance_however_it_is_written(project: ProjectOf, signals: str) -> None:
    made = loop(project(text(signals)))
    assert instances(made) == ["winder", "dancer", "trim", "readout"]
    assert solve(made.wiring).determinant == solve(loop(project(text())).wiring).determinant


def test_an_instance_keeps_the_signal_that_a_break_would_cut(project: ProjectOf) -> None:
    signals = """
      error: ask - place
      again: trim(ask - place)
      volt:  trim(error)
      speed: winder(volt) + slack
      place: dancer(speed)
      shown: readout(place)
"""
    made = loop(project(text(signals)))
    trim = next(instance for instance in made.wiring.instances if instance.name == "trim")
    assert trim.arguments["input"] == LinearForm(((fmpq(1), SignalRef("error")),))


TWO = SIGNALS + "      other: dancer(slack)\n"


def test_a_block_with_a_memory_has_one_input(findings: Findings) -> None:
    found = findings(text(TWO))
    assert [finding.rule for finding in found] == ["schema-violation"]
    assert "`dancer` is applied to different arguments" in found[0].message
    assert "instances: separate" in found[0].message
    assert (found[0].loop, found[0].place.column) == ("tension", 14)
    assert found[0].related[0].place.line == found[0].place.line - 2


def test_separate_instances_may_differ(project: ProjectOf) -> None:
    made = loop(project(text(TWO, dancer=", instances: separate")))
    assert instances(made) == ["winder", "dancer", "dancer (2)", "trim", "readout"]
    assert made.subsystems["dancer (2)"] == "dancer"


def test_a_plain_gain_may_be_used_anywhere(project: ProjectOf) -> None:
    made = loop(project(text(SIGNALS + "      other: trim(ask)\n")))
    assert instances(made) == ["winder", "dancer", "trim", "trim (2)", "readout"]


def test_a_gain_with_a_dead_time_has_a_memory(findings: Findings) -> None:
    delayed = text(SIGNALS + "      other: trim(ask)\n").replace(
        "{gain: 0.03 V/mm}", "{gain: 0.03 V/mm, dead_time: 1 ms}"
    )
    assert ["`trim` is applied to different" in finding.message for finding in findings(delayed)] == [True]


def test_constants_in_sums_are_coherent_si(project: ProjectOf) -> None:
    made = loop(project(text(SIGNALS + "      mixed: 2*ask - 50 % * place - (3 mm/s)*speed/(1 m/s)*(1 s)\n")))
    assert made.wiring.signals["mixed"].terms == (
        (fmpq(2), SignalRef("ask")),
        (fmpq(-1, 2), SignalRef("place")),
        (fmpq(-3, 1000), SignalRef("speed")),
    )


# --- what this version does not answer ---------------------------------------------------------------------


def test_a_dead_time_beside_the_loop_leaves_the_loop_alone(project: ProjectOf) -> None:
    made = loop(project(text(readout=", dead_time: 20 ms")))
    assert instances(made) == ["winder", "dancer", "trim", "readout"]
    assert (made.responses, made.breaks, made.unsupported) == ({}, {}, None)
    late = solve_delayed(made.wiring)
    assert late.undelayed("ask", ("place",))
    assert not late.undelayed("ask", ("shown",))
    exact = solve(loop(project(text())).wiring).channel("ask", "place").transfer.reduced()
    assert late.rest.channel("ask", "place").transfer.reduced() == exact


def test_a_dead_time_in_the_loop_is_kept_exactly(project: ProjectOf) -> None:
    made = loop(project(text(winder=", dead_time: 20 ms")))
    assert [instance.block.dead_time for instance in made.wiring.instances] == [fmpq(1, 50), 0, 0, 0]
    assert not solve_delayed(made.wiring).undelayed("ask", ("place",))


def test_a_dead_time_of_zero_is_none(project: ProjectOf) -> None:
    assert not has_dead_time(loop(project(text(winder=", dead_time: 0 s"))).wiring)


@pytest.mark.parametrize(("delay", "message"), [("-1 ms", "not negative"), ("3 mm", "a dead time is in s")])
def test_a_dead_time_is_a_time(findings: Findings, delay: str, message: str) -> None:
    found = findings(text(winder=f", dead_time: {delay}"))
    assert [message in finding.message for finding in found] == [True]


def test_a_sampled_block_stands_beside_the_wiring_in_s(project: ProjectOf) -> None:
    sampled = text().replace("{gain: 0.03 V/mm}", "{sampled: {period: 1 ms, numerator: [3, -2], denominator: [1, 0]}}")
    made = loop(project(sampled))
    assert made.responses == {}
    assert made.unsupported is None
    assert made.sampled is not None
    assert made.sampled.period == fmpq(1, 1000)
    assert made.sampled.inputs == ("ask", "slack")
    assert [one.name for one in made.sampled.instances] == ["trim"]
    assert made.wiring.inputs == ("ask", "slack", "trim.output")
    assert instances(made) == ["winder", "dancer", "readout"]


# --- rest and pi -------------------------------------------------------------------------------------------


def test_rest_is_zero_unless_given(project: ProjectOf) -> None:
    made = loop(project(text(rest="rest: {place: 30 mm, ask: 3 cm}")))
    assert made.rest == {name: fmpq(3, 100) if name in ("ask", "place") else 0 for name in made.rest}
    assert list(made.rest) == ["ask", "slack", "volt", "speed", "place", "shown"]


@pytest.mark.parametrize(
    ("unit", "rest", "expected"),
    [
        ("degC", "20 degC", fmpq(20)),
        ("degC", "293.15 K", fmpq(20)),
        ("K", "20 degC", fmpq(29315, 100)),
        ("K", "300 K", fmpq(300)),
        ("degC", "ambient", fmpq(25)),
        ("K", "ambient", fmpq(29815, 100)),
        ("K", "ambient + 5 K", fmpq(30315, 100)),
        ("degC", "-10 degC", fmpq(-10)),
        ("K", "-10 degC", fmpq(26315, 100)),
        ("K", "0", fmpq(0)),
    ],
)
def test_rest_is_an_absolute_temperature(project: ProjectOf, unit: str, rest: str, expected: fmpq) -> None:
    made = project(
        f"""
        parameters: {{ambient: {{value: 25 degC, source: x}}}}
        subsystems:
          oven: {{input: {{unit: W}}, output: {{unit: {unit}}}, model: {{gain: 2 K/W, lags: [90 s]}}}}
        loops:
          heat:
            inputs: {{power: {{unit: W}}}}
            signals: {{warmth: oven(power)}}
            rest: {{warmth: {rest}}}
        """
    )
    assert instantiate(made, values(made))["heat"].rest["warmth"] == expected


def test_a_loop_knows_that_it_rests_on_pi(project: ProjectOf) -> None:
    made = project(text().replace("lags: [0.5 s]", "pairs: [{natural_frequency: 2 Hz, damping: 0.4}]"))
    assert loop(made).depends_on_pi
    first = solve(loop(made).wiring).determinant
    again = solve(instantiate(made, values(made, PRECISE_PI))["tension"].wiring).determinant
    assert first != again
    assert (
        solve(loop(made).wiring).stable is solve(instantiate(made, values(made, PRECISE_PI))["tension"].wiring).stable
    )


def test_a_constant_in_a_sum_counts_for_pi_too(project: ProjectOf) -> None:
    assert loop(project(text(SIGNALS + "      mixed: pi*ask\n"))).depends_on_pi
