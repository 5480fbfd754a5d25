"""Laws that hold from the file to the verdict, and values against the matrix exponential of scipy."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from scipy.linalg import expm

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review

Reviewed = Callable[[str], Review]

LOOP = """\
specgate: 1
project: {{id: LW-1, title: Laws, revision: A}}
subsystems:
  law: {{input: {{unit: {u}}}, output: {{unit: V}}, model: {{gain: 120 V/m, integrators: 0, leads: [{lead}]}}}}
{more}  axis:
    input: {{unit: V}}
    output: {{unit: {u}}}
    model: {{gain: 0.05 m/s/V, integrators: 1, lags: [{lag}, {fast}]}}
loops:
  place:
    inputs: {{ask: {{unit: {u}}}}}
    signals: {{volt: law(ask - at), at: {chain}}}
    breaks: {{main: at}}
    responses: {{follow: {{from: ask, to: at, input: step, size: {size}}}}}
requirements:
  R1: {{text: It shall stay in order., criterion: {{response: place.follow, measure: overshoot, at_most: 1000 %}}}}
"""
METRES = {
    "u": "m",
    "lead": "0.05 s",
    "lag": "0.2 s",
    "fast": "0.01 s",
    "size": "0.02 m",
    "more": "",
    "chain": "axis(volt)",
}
MILLIMETRES = {**METRES, "u": "mm", "lead": "50 ms", "lag": "200 ms", "fast": "10 ms", "size": "20 mm"}


@pytest.fixture
def reviewed(tmp_path: Path) -> Reviewed:
    def make(text: str) -> Review:
        path = tmp_path / "specgate.yaml"
        path.write_text(text)
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return review(project)

    return make


def _figures(found: Review) -> dict[str, float | None]:
    loop = found.loops["place"]
    measures = (*loop.responses["follow"].measures, *loop.breaks["main"].measures)
    return {one.measure: None if one.value is None else float(one.value) for one in measures}


def test_other_units_give_the_same_figures(reviewed: Reviewed) -> None:
    metres, millimetres = (_figures(reviewed(LOOP.format(**words))) for words in (METRES, MILLIMETRES))
    in_signal = {
        "final_value",
        "initial_value",
        "maximum_value",
        "minimum_value",
        "peak_deviation",
        "steady_state_error",
    }
    for name, value in metres.items():
        other = millimetres[name]
        assert (value is None) == (other is None), name
        if value is not None and other is not None:
            assert other == pytest.approx(value * (1000 if name in in_signal else 1), rel=1e-11, abs=1e-15), name


@pytest.mark.parametrize(("root", "hides_growth"), [("2", False), ("-1", True)])
def test_a_block_and_its_inverse_leave_hidden_modes(reviewed: Reviewed, root: str, hides_growth: bool) -> None:
    plain = reviewed(LOOP.format(**METRES))
    ports = "input: {unit: V}, output: {unit: V}"
    more = (
        f"  there: {{{ports}, model: {{numerator: [1, {root}], denominator: [1, 5]}}}}\n"
        f"  back: {{{ports}, model: {{numerator: [1, 5], denominator: [1, {root}]}}}}\n"
    )
    cascade = reviewed(LOOP.format(**{**METRES, "more": more, "chain": "axis(back(there(volt)))"}))
    rules = {one.rule for one in cascade.findings}
    hidden = {mode.response: len(mode.poles) for mode in cascade.loops["place"].hidden_modes}
    assert hidden == {"follow": 2}
    if hides_growth:
        assert "hidden-unstable-mode" in rules
        assert cascade.requirements["R1"].verdict == "non_compliant"
    else:
        assert "hidden-mode" in rules
        assert _figures(cascade) == _figures(plain)


@pytest.mark.parametrize("time", ["0.01", "0.07", "0.2", "0.45", "0.9", "1.7", "3"])
def test_values_are_those_of_the_matrix_exponential(reviewed: Reviewed, time: str) -> None:
    asked = f"measure: value_at, time: {time} s, within: 1 m, of: 0 m"
    limit = f"  R2: {{text: It shall be there., criterion: {{response: place.follow, {asked}}}}}\n"
    found = reviewed(LOOP.format(**METRES) + limit).requirements["R2"].criteria[0].result
    # states: position, speed, drive; 120 (1 + 0.05 s) acts on e = 0.02 - position, in volt
    gain, lead, lag, fast, speed, size = 120.0, 0.05, 0.2, 0.01, 0.05, 0.02
    closed = np.array(
        [
            [0.0, 1.0, 0.0],
            [0.0, -1.0 / lag, speed / lag],
            [-gain / fast, -gain * lead / fast, -1.0 / fast],
        ]
    )
    steady = np.array([size, 0.0, 0.0])
    # the lead passes the step's impulse of 120 * 0.05 * size into the lag of the drive
    start = np.array([0.0, 0.0, gain * lead * size / fast])
    state = steady + expm(closed * float(time)) @ (start - steady)
    assert found.value == pytest.approx(float(state[0]), rel=1e-9)
