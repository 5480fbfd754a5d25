"""Rare ways through a loop: a delayed term that vanishes more often at s = 0 than the rest, a block too steep."""

from __future__ import annotations

from pathlib import Path
from textwrap import dedent

import pytest
from flint import fmpq

from specgate.analysis.analyse import analyse
from specgate.analysis.analyses import Missing, ResponseAnalysis
from specgate.intake.load import Problems, load
from specgate.response.answers import Absent

WASHOUT = """
    specgate: 1
    project: {id: O-1, title: Odd, revision: A}
    subsystems:
      late: {input: {unit: 1}, output: {unit: 1}, model: {gain: 1, lags: [2 s], dead_time: 0.3 s}}
      washout: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1, 0], denominator: [1, 3]}}
      turned: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [-1, 1], denominator: [1, 1]}}
    loops:
      loop:
        inputs: {u: {unit: 1}}
        signals: {y: turned(u) - washout(late(y))}
        responses: {r: {from: u, to: y, input: step, size: 1}}
    """
STEEP = """
    specgate: 1
    project: {id: O-2, title: Odd, revision: A}
    subsystems:
      law:
        input: {unit: 1}
        output: {unit: 1}
        model: {sampled: {period: 0.1 s, numerator: [1], denominator: [1, -0.9]}}
      rate: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1, 0], denominator: [1]}}
      lag: {input: {unit: 1}, output: {unit: 1}, model: {gain: 1, lags: [1 s]}}
    loops:
      loop:
        inputs: {u: {unit: 1}}
        signals: {y: rate(law(lag(u)))}
        responses: {r: {from: u, to: y, input: step, size: 1}}
    """


def only(text: str, folder: Path) -> ResponseAnalysis:
    (folder / "specgate.yaml").write_text(dedent(text))
    project = load(folder)
    assert not isinstance(project, Problems), [one.message for one in project.findings]
    return analyse(project).nominal.loops["loop"].responses["r"]


@pytest.mark.parametrize(
    ("time", "expected"),
    [
        (fmpq(1, 10), -0.809674836071919),
        (fmpq(35, 100), -0.387615892723736),
        (fmpq(5, 2), 0.755686476486141),
        (fmpq(7), 0.975832194606676),
    ],
)
def test_a_delayed_term_with_more_zeros_at_the_origin_than_the_rest(
    tmp_path: Path, time: fmpq, expected: float
) -> None:
    # (1-s)(s+3)(2s+1)/(s(s+1)((s+3)(2s+1) + s e^(-0.3 s))) inverted by mpmath, method of de Hoog, degree 60.
    subject = only(WASHOUT, tmp_path).subject
    assert not isinstance(subject, Missing)
    assert not isinstance(subject.response, Absent)
    assert float(subject.response.value_at(time).enclose(64).mid()) == pytest.approx(expected, abs=1e-13)


def test_a_block_that_differentiates_after_a_sampled_one_is_said_to_be_unanswered(tmp_path: Path) -> None:
    subject = only(STEEP, tmp_path).subject
    assert isinstance(subject, Missing)
    assert subject.later
    assert "`rate` differentiates without a lag" in subject.reason
