"""Parameters: scopes, formulas, circles, other values, pi."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.project.faults import Fault
from specgate.project.instantiate import PI, PRECISE_PI, depends_on_pi, evaluate, values
from specgate.project.parameters import settle
from specgate.project.types import Project
from specgate.terms.dimensions import TIME
from specgate.terms.findings import Finding

ProjectOf = Callable[[str], Project]
Findings = Callable[[str], tuple[Finding, ...]]

TEXT = """
parameters:
  stroke: {value: 6.2 m, source: x}
  gain: {value: 2, source: x}
  half: {formula: stroke/2}
  quarter: {formula: half/gain}
subsystems:
  hoist:
    parameters:
      gain: {value: 42 mm/s/V, source: x}
      lag: {value: 85 ms, tolerance: [-10 %, +25 %], source: x}
      twice: {formula: 2*lag}
      turns: {formula: 3 rev/s*lag}
      later: {formula: turns/pi}
    input: {unit: V}
    output: {unit: m/s}
    model: {numerator: [gain], denominator: [lag, 1]}
  drum:
    input: {unit: V}
    output: {unit: m/s}
    model: {numerator: [hoist.gain*gain], denominator: [hoist.lag, 1]}
"""


def test_values_in_coherent_si(project: ProjectOf) -> None:
    numbers = values(project(TEXT.replace("3 rev/s*lag", "3 rev/s * lag"))).numbers
    assert numbers["stroke"] == fmpq(62, 10)
    assert numbers["quarter"] == fmpq(155, 100)
    assert numbers["hoist.gain"] == fmpq(42, 1000)
    assert numbers["hoist.twice"] == fmpq(17, 100)
    assert numbers["hoist.turns"] == 6 * PI * fmpq(85, 1000)
    assert numbers["hoist.later"] == 6 * fmpq(85, 1000)


def test_what_rests_on_pi_is_followed_through_formulas(project: ProjectOf) -> None:
    found = values(project(TEXT.replace("3 rev/s*lag", "3 rev/s * lag")))
    assert found.rounded == {"hoist.turns", "hoist.later"}
    assert depends_on_pi(found.written["hoist.later"][0], found, "hoist")
    assert not depends_on_pi(found.written["hoist.twice"][0], found, "hoist")


def test_a_longer_pi_moves_what_rests_on_it_and_nothing_else(project: ProjectOf) -> None:
    made = project(TEXT.replace("3 rev/s*lag", "3 rev/s * lag"))
    coarse, fine = values(made), values(made, PRECISE_PI)
    moved = {name for name in coarse.numbers if coarse.numbers[name] != fine.numbers[name]}
    assert moved == {"hoist.turns"}
    assert 0 < abs(coarse.numbers["hoist.turns"] - fine.numbers["hoist.turns"]) < fmpq(1, 10**58)


def test_a_subsystem_reads_its_own_names_first(project: ProjectOf) -> None:
    made = project(TEXT.replace("3 rev/s*lag", "3 rev/s * lag"))
    found = values(made)
    assert found.scopes["hoist"]["gain"] == "hoist.gain"
    assert found.scopes["drum"]["gain"] == "gain"
    assert found.scopes[None]["hoist.gain"] == "hoist.gain"
    assert "lag" not in found.scopes["drum"]
    numerator = made.subsystems["drum"].model.numerator[0]  # type: ignore[union-attr]
    assert evaluate(numerator, found, "drum") == fmpq(84, 1000)


def test_other_values_flow_into_formulas(project: ProjectOf) -> None:
    made = project(TEXT.replace("3 rev/s*lag", "3 rev/s * lag"))
    found = values(made, replaced={"hoist.lag": fmpq(1, 10), "gain": fmpq(4)})
    assert found.numbers["hoist.twice"] == fmpq(1, 5)
    assert found.numbers["quarter"] == fmpq(31, 40)
    assert found.inferred["hoist.lag"] == TIME


@pytest.mark.parametrize(
    ("parameters", "message", "rule"),
    [
        ("a: {formula: b}, b: {formula: c}, c: {formula: a}", "a → b → c → a", "schema-violation"),
        ("a: {formula: 2*a}", "a → a", "schema-violation"),
        ("a: {formula: b}, b: {formula: c*e}, c: {formula: b}, e: {formula: b}", "b → c → b", "schema-violation"),
        ("a: {value: 1 m, source: x}, b: {formula: a + 1 s}", "cannot be added to", "dimension-mismatch"),
        ("a: {value: 0, source: x}, b: {formula: 1/a}", "division by zero", "schema-violation"),
        ("a: {value: 1 m, tolerance: 2 s, source: x}", "the tolerance is in s", "dimension-mismatch"),
        ("a: {value: 1 m, tolerance: 2, source: x}", "the tolerance is a plain number", "dimension-mismatch"),
        ("a: {value: 9**64, source: x}, b: {formula: a**64}", "too large", "schema-violation"),
    ],
)
def test_what_is_wrong_with_a_parameter_is_said_once(
    findings: Findings, parameters: str, message: str, rule: str
) -> None:
    found = findings(f"parameters: {{{parameters}, after: {{formula: a}}}}")
    assert [(finding.rule, message in finding.message) for finding in found] == [(rule, True)]


def test_a_good_tolerance_passes(findings: Findings) -> None:
    assert not findings("parameters: {a: {value: 1 m, tolerance: 2 mm, source: x}}")
    assert not findings("parameters: {a: {value: 20 degC, tolerance: [-2 K, +3 K], source: x}}")


def test_the_first_fault_is_raised_where_no_findings_are_wanted(project: ProjectOf) -> None:
    made = project("parameters: {a: {value: 2, source: x}, b: {formula: 1/(a - 1)}}")
    with pytest.raises(Fault, match="division by zero"):
        values(made, replaced={"a": fmpq(1)})


def test_the_work_on_a_chain_of_formulas_grows_with_its_length(
    project: ProjectOf, work: Callable[[Callable[[], object]], int]
) -> None:
    def chain(links: int) -> Project:
        formulas = ", ".join(f"p{i}: {{formula: p{i + 1} + 1}}" for i in range(links))
        return project(f"parameters: {{{formulas}, p{links}: {{value: 1, source: x}}}}")

    short, long = chain(500), chain(2000)
    assert settle(long)[0].numbers["p0"] == 2001
    assert work(lambda: settle(long)) < 4.2 * work(lambda: settle(short))
