"""Steady-state errors claimed from the position constant: where L at a break is the loop that makes the error."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import fmpq

from specgate.compliance.assessment import Assessment, Audit
from specgate.terms.verdicts import Standing, Trilean

Judge = Callable[[str], Mapping[str, Assessment]]

LOOP = """
    specgate: 1
    project: {{id: B-1, title: Bases, revision: A}}
    subsystems:
      controller: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {controller}}}
      plant: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {plant}}}
      sensor: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {sensor}}}
    loops:
      loop:
        inputs: {{r: {{unit: 1}}, d: {{unit: 1}}}}
        signals:
          u: controller(r - m)
          y: plant(u + d)
          m: sensor(y)
        {breaks}
        responses:
          follow: {{from: r, to: y, input: step, size: 5}}
          reject: {{from: d, to: y, input: step, size: 5, reference: 0}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.{response}, measure: steady_state_error, at_most: 9}}
        basis: {{approximation: static_error_constants, claimed: {claimed}}}
    """
LAG, INTEGRATOR = "{numerator: [4], denominator: [2, 1]}", "{numerator: [4], denominator: [2, 1, 0]}"


@pytest.fixture
def audited(judge: Judge) -> Callable[..., Audit]:
    def audit(plant: str, claimed: str, response: str = "follow", **more: str) -> Audit:
        parts = {"controller": "{gain: 2}", "sensor": "{gain: 1}", "breaks": "breaks: {b: y}", **more}
        text = LOOP.format(plant=plant, claimed=claimed, response=response, **parts)
        return judge(text)["R"].criteria[0].audit

    return audit


def unity(audit: Audit) -> Trilean:
    return next(one.found.holds for one in audit.conditions if one.condition.key == "unity_feedback")


def test_a_lag_leaves_one_over_one_plus_kp(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "0.556")
    assert found.standing is Standing.SOUND
    assert found.formula is not None
    assert found.formula.exact == fmpq(5, 9)
    assert found.error is not None
    assert found.error.side == "none"


def test_an_integrator_leaves_nothing(audited: Callable[..., Audit]) -> None:
    found = audited(INTEGRATOR, "0", controller="{gain: 0.1}")
    assert found.standing is Standing.SOUND
    assert found.formula is not None
    assert found.formula.exact == 0


def test_a_load_step_before_the_integrator_is_not_cancelled(audited: Callable[..., Audit]) -> None:
    """L is of type 1 and promises no error; the load leaves size/gain = 50."""
    found = audited(INTEGRATOR, "0", response="reject", controller="{gain: 0.1}")
    assert found.standing is Standing.OUT_OF_RANGE
    assert unity(found) is Trilean.NO
    assert found.formula is not None
    assert found.formula.exact == 0
    assert found.error is not None
    assert found.error.truth.exact == 50
    assert found.error.side == "unsafe"
    assert found.instead is not None
    assert found.instead.name == "final_value_theorem"
    assert found.instead.value is not None
    assert found.instead.value.exact == 50


def test_a_sensor_with_a_gain_is_no_unity_feedback(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "0.50", sensor="{gain: 1.01}")
    assert found.standing is Standing.OUT_OF_RANGE
    assert unity(found) is Trilean.NO


def test_a_sensor_that_only_lags_still_changes_the_error_over_time(audited: Callable[..., Audit]) -> None:
    """The error is that of reference minus output, which is not 1/(1 + L) although both end at one value."""
    assert unity(audited(LAG, "0.556", sensor="{numerator: [1], denominator: [0.1, 1]}")) is Trilean.NO


def test_the_break_that_fits_is_found(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "0.556", breaks="breaks: {a: u, b: y}")
    assert found.standing is Standing.SOUND
    assert next(one.found.value for one in found.conditions if one.condition.key == "unity_feedback") == "around `a`"


def test_without_a_break_there_is_nothing_to_read(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "0.556", breaks="")
    assert found.standing is Standing.OUT_OF_RANGE
    assert found.formula is not None
    assert found.formula.absent is not None
    assert "no break is declared" in found.formula.absent.reason


def test_an_unstable_loop_has_no_steady_state(audited: Callable[..., Audit]) -> None:
    found = audited("{numerator: [4], denominator: [2, 1, 1, 0]}", "0")
    assert found.standing is Standing.OUT_OF_RANGE
    assert any(one.condition.key == "stable" and one.found.holds is Trilean.NO for one in found.conditions)
