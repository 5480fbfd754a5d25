"""Steady values of loops with dead time: error constants and the limit at s = 0 are exact through it."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import fmpq

from specgate.compliance.assessment import Assessment, Audit
from specgate.terms.verdicts import Standing

Judge = Callable[[str], Mapping[str, Assessment]]

PROJECT = """
    specgate: 1
    project: {{id: L-1, title: Late and steady, revision: A}}
    subsystems:
      law: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: {gain}}}}}
      body:
        input: {{unit: 1}}
        output: {{unit: 1}}
        model: {{numerator: [1], denominator: {body}, dead_time: 0.4 s}}
    loops:
      loop:
        inputs: {{r: {{unit: 1}}, d: {{unit: 1}}}}
        signals: {{u: law(r - y), y: body(u + d)}}
        breaks: {{b: y}}
        responses:
          follow: {{from: r, to: y, input: step, size: 4}}
          chase: {{from: r, to: y, input: ramp, slope: 3 1/s}}
          reject: {{from: d, to: y, input: step, size: 4, reference: 0}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.{response}, measure: {measure}, within: 99, of: 0}}
        basis: {{approximation: {basis}}}
    """
LAG, INTEGRATOR = "[1, 1]", "[1, 1, 0]"
CONSTANTS, LIMIT = "static_error_constants", "final_value_theorem"


@pytest.fixture
def audited(judge: Judge) -> Callable[..., Audit]:
    def audit(response: str, basis: str, body: str, measure: str = "steady_state_error", gain: str = "0.5") -> Audit:
        text = PROJECT.format(response=response, basis=basis, body=body, measure=measure, gain=gain)
        text = text.replace("within: 99, of: 0", "at_most: 99") if measure == "steady_state_error" else text
        return judge(text)["R"].criteria[0].audit

    return audit


@pytest.mark.parametrize(
    ("response", "basis", "body", "measure", "value"),
    [
        ("follow", CONSTANTS, LAG, "steady_state_error", fmpq(8, 3)),
        ("follow", LIMIT, LAG, "steady_state_error", fmpq(8, 3)),
        ("follow", LIMIT, LAG, "final_value", fmpq(4, 3)),
        ("follow", CONSTANTS, INTEGRATOR, "steady_state_error", fmpq(0)),
        ("follow", LIMIT, INTEGRATOR, "final_value", fmpq(4)),
        ("chase", CONSTANTS, INTEGRATOR, "steady_state_error", fmpq(6)),
        ("chase", LIMIT, INTEGRATOR, "steady_state_error", fmpq(6)),
        ("reject", LIMIT, INTEGRATOR, "steady_state_error", fmpq(8)),
        ("reject", LIMIT, INTEGRATOR, "final_value", fmpq(8)),
    ],
)
def test_exact_through_a_dead_time(
    audited: Callable[..., Audit], response: str, basis: str, body: str, measure: str, value: fmpq
) -> None:
    found = audited(response, basis, body, measure)
    assert found.standing is Standing.SOUND
    assert found.formula is not None
    assert found.formula.exact == value
    assert found.error is not None
    assert found.error.side == "none"
    assert found.error.truth.exact == value


@pytest.mark.parametrize(
    ("response", "basis", "body", "gain"),
    [
        ("reject", CONSTANTS, INTEGRATOR, "0.5"),  # the load enters before the integrator
        ("chase", CONSTANTS, LAG, "0.5"),  # one integrator too few: the error grows
        ("chase", LIMIT, LAG, "0.5"),
        ("follow", CONSTANTS, LAG, "9"),  # 0.4 s of dead time: not stable
        ("follow", LIMIT, LAG, "9"),
    ],
)
def test_where_they_do_not_apply(
    audited: Callable[..., Audit], response: str, basis: str, body: str, gain: str
) -> None:
    assert audited(response, basis, body, gain=gain).standing is Standing.OUT_OF_RANGE
