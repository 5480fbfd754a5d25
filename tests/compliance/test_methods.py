"""Methods and stages: what is due now must conclude, what is due later is counted and does not hold the review."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest

from specgate.compliance.assessment import Assessment
from specgate.compliance.methods import due
from specgate.project.types import Method, ProjectInfo
from specgate.terms.places import Place
from specgate.terms.verdicts import Verdict

Judge = Callable[[str], Mapping[str, Assessment]]
HERE = Place("specgate.yaml", 1, 1)
STAGES = ("PDR", "CDR", "acceptance")


@pytest.mark.parametrize(
    ("stage", "now", "expected"),
    [
        (None, "PDR", True),
        ("PDR", "CDR", True),
        ("CDR", "CDR", True),
        ("acceptance", "CDR", False),
        ("acceptance", None, True),
        ("unheard of", "CDR", True),
    ],
)
def test_when_a_method_is_due(stage: str | None, now: str | None, expected: bool) -> None:
    info = ProjectInfo("X", "X", "A", None, now, STAGES, (), HERE)
    assert due(Method("test", HERE, stage), info) is expected


PROJECT = """
    specgate: 1
    project: {{id: M-1, title: Methods, revision: A, stage: CDR, stages: [PDR, CDR, acceptance]}}
    subsystems:
      lag: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1], denominator: [1, 1]}}}}
    loops:
      loop:
        inputs: {{u: {{unit: 1}}}}
        signals: {{y: lag(u)}}
        responses: {{r: {{from: u, to: y, input: step, size: 1}}}}
    requirements:
      R:
        text: It shall settle.
        verification: {verification}
        criterion: {{response: loop.r, measure: settling_time, band: 2 %, at_most: {limit}}}
    """
MET, MISSED = "4 s", "3 s"


@pytest.mark.parametrize(
    ("verification", "limit", "verdict", "counts", "outcomes"),
    [
        ("analysis", MET, Verdict.COMPLIANT, True, [Verdict.COMPLIANT]),
        ("analysis", MISSED, Verdict.NON_COMPLIANT, True, [Verdict.NON_COMPLIANT]),
        ("[analysis, test]", MET, Verdict.OPEN, True, [Verdict.COMPLIANT, "no_record"]),
        ("[analysis, test]", MISSED, Verdict.NON_COMPLIANT, True, [Verdict.NON_COMPLIANT, "no_record"]),
        ("[{method: analysis, stage: PDR}]", MET, Verdict.COMPLIANT, True, [Verdict.COMPLIANT]),
        ("[{method: test, stage: acceptance}]", MET, Verdict.COMPLIANT, False, ["due_later"]),
        ("[{method: test, stage: acceptance}]", MISSED, Verdict.NON_COMPLIANT, True, ["due_later"]),
        ("[{method: analysis, stage: acceptance}]", MISSED, Verdict.NON_COMPLIANT, False, ["due_later"]),
        (
            "[analysis, {method: test, stage: acceptance}]",
            MET,
            Verdict.COMPLIANT,
            True,
            [Verdict.COMPLIANT, "due_later"],
        ),
    ],
)
def test_verdict_by_methods(
    judge: Judge, verification: str, limit: str, verdict: Verdict, counts: bool, outcomes: list[object]
) -> None:
    found = judge(PROJECT.format(verification=verification, limit=limit))["R"]
    assert found.verdict is verdict
    assert found.due is counts
    assert [one.outcome for one in found.methods] == outcomes
