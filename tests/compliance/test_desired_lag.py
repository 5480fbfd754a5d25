"""Loops with dead time as the lag they were tuned for: stated accuracies against proved responses, by search."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from math import log

import pytest
from scipy.optimize import minimize_scalar

from specgate.compliance.assessment import Assessment, Audit
from specgate.terms.verdicts import Standing

Judge = Callable[[str], Mapping[str, Assessment]]
Audited = Callable[[str, float], Audit]

PROJECT = """
    specgate: 1
    project: {{id: D-1, title: Tuned for a lag, revision: A}}
    subsystems:
      law: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [3, 1], denominator: [1, 0]}}}}
      body: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: {gain}, lags: [3 s], dead_time: {dead_time} s}}}}
    loops:
      loop:
        inputs: {{r: {{unit: 1}}}}
        signals: {{u: law(r - y), y: body(u)}}
        breaks: {{b: y}}
        responses: {{f: {{from: r, to: y, input: step, size: 1}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.f, measure: {asked}, at_most: 999 s, basis: {{approximation: desired_lag}}}}
    """
ASKED: Mapping[str, tuple[tuple[int, int], tuple[int, int]]] = {
    "settling_time, band: 1 %": ((0, 136), (-158, 478)),
    "settling_time, band: 2 %": ((0, 121), (-190, 374)),
    "settling_time, band: 5 %": ((0, 94), (0, 199)),
    "rise_time": ((0, 108), (0, 177)),
    "delay_time": ((-65, 0), (-154, 0)),
}


@pytest.fixture
def audited(judge: Judge) -> Audited:
    def audit(asked: str, ratio: float) -> Audit:
        """Return the audit of a loop with a dead time of `ratio` s that is tuned for a lag of 1 s.

        The gain lets the lag be a trillionth longer, so that it is no shorter than said.
        """
        gain = 1 / (1 + ratio) - 1e-12
        return judge(PROJECT.format(gain=f"{gain:.14f}", dead_time=f"{ratio:.10f}", asked=asked))["R"].criteria[0].audit

    return audit


@pytest.mark.parametrize("asked", ASKED)
@pytest.mark.parametrize("part", [0, 1])
def test_the_accuracy_is_reached_and_never_left(audited: Audited, asked: str, part: int) -> None:
    low, high = (end / 1000 for end in ASKED[asked][part])

    def error(ratio: float) -> float:
        found = audited(asked, ratio)
        assert found.implied is not None
        assert found.error is not None
        assert found.error.relative is not None
        value = float(found.error.relative.enclose(64).mid())
        assert low - 1e-9 <= value <= high + 1e-9, (ratio, value)
        return value

    if part == 0:  # the longer the dead time, the further off
        values = [error(ratio) for ratio in (0.01, 0.2, 0.35, 0.49, 0.5)]
        assert values == sorted(values, reverse=low < 0)
        reached = min(values), max(values)
    else:
        grid = {ratio: error(ratio) for ratio in (0.01, 0.51, 0.65, 0.75, 0.85, 1.0)}
        best = max(grid, key=grid.__getitem__)
        inner = minimize_scalar(
            lambda ratio: -error(float(ratio)),
            bounds=(max(best - 0.1, 0.01), min(best + 0.1, 1.0)),
            method="bounded",
            options={"maxiter": 8},
        )
        reached = min(grid.values()), max(grid[best], -float(inner.fun))
    slack = (high - low) / 10
    assert reached[0] <= low + slack
    assert reached[1] >= high - slack


def test_by_hand(audited: Audited) -> None:
    """A dead time of 0.25 s and a lag of 1 s: settled at 0.25 + ln 50, risen in ln 9, half way at 0.25 + ln 2."""
    for asked, by_hand in (
        ("settling_time, band: 2 %", 0.25 + log(50)),
        ("rise_time", log(9)),
        ("delay_time", 0.25 + log(2)),
    ):
        found = audited(asked, 0.25)
        assert found.formula is not None
        assert float(found.formula.enclose(64).mid()) == pytest.approx(by_hand, rel=1e-9)
        assert found.standing is Standing.SOUND


def test_a_band_without_a_stated_accuracy(audited: Audited) -> None:
    found = audited("settling_time, band: 3 %", 0.25)
    assert found.standing is Standing.INCONCLUSIVE
    assert found.formula is not None
    assert float(found.formula.enclose(64).mid()) == pytest.approx(0.25 + log(100 / 3), rel=1e-9)


def test_a_tighter_threshold_is_the_projects_own(judge: Judge) -> None:
    text = PROJECT.format(gain="0.625", dead_time="0.6", asked="rise_time")
    policy = text.replace("    subsystems:", "    approximations: {desired_lag: {dead_time: 0.5}}\n    subsystems:", 1)
    assert judge(text)["R"].criteria[0].audit.standing is Standing.SOUND
    assert judge(policy)["R"].criteria[0].audit.standing is Standing.OUT_OF_RANGE
