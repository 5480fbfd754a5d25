"""Parents from children, circles, what does not apply, several criteria, bases on a requirement."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from textwrap import indent

import pytest

from specgate.compliance.assessment import Assessment
from specgate.terms.verdicts import Standing, Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

HEAD = """specgate: 1
project: {id: A-1, title: Assess, revision: A}
subsystems:
  lag: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1], denominator: [1, 1]}}
loops:
  loop:
    inputs: {u: {unit: 1}}
    signals: {y: lag(u)}
    breaks: {b: y}
    responses: {r: {from: u, to: y, input: step, size: 1}}
requirements:
"""
MET = "verification: analysis, criterion: {response: loop.r, measure: settling_time, band: 2 %, at_most: 4 s}"
MISSED = "verification: analysis, criterion: {response: loop.r, measure: settling_time, band: 2 %, at_most: 3 s}"
OPEN = "verification: analysis, criterion: {break: loop.b, measure: loop_type, equals: 0, evaluate: worst_case}"
PARENT = "decided_by: derived"
COVERED = "decided_by: derived, coverage: {complete: true}"
AWAY = f"{MISSED}, not_applicable: {{reason: Other variant., approved_by: Systems, approved_on: 2026-11-02}}"


def project(**requirements: str) -> str:
    lines = [f"{name}: {{text: It shall., {body}}}" for name, body in requirements.items()]
    return HEAD + indent("\n".join(lines), "  ") + "\n"


def below(parent: str, body: str) -> str:
    return f"derived_from: [{parent}], {body}"


@pytest.mark.parametrize(
    ("parent", "children", "verdict"),
    [
        (COVERED, [MET, MET], Verdict.COMPLIANT),
        (COVERED, [MET, MISSED, OPEN], Verdict.NON_COMPLIANT),
        (COVERED, [MET, OPEN], Verdict.OPEN),
        (COVERED, [MET, AWAY], Verdict.COMPLIANT),
        (COVERED, [AWAY], Verdict.OPEN),
        (COVERED, [], Verdict.OPEN),
        (PARENT, [MET], Verdict.OPEN),
        (PARENT, [MISSED], Verdict.NON_COMPLIANT),
    ],
)
def test_a_need_is_decided_by_what_is_derived_from_it(
    judge: Judge, parent: str, children: list[str], verdict: Verdict
) -> None:
    derived = {f"R{number}": below("N", body) for number, body in enumerate(children)}
    found = judge(project(N=parent, **derived))
    assert found["N"].verdict is verdict
    assert list(found) == ["N", *derived]
    assert (found["N"].reason is None) is (verdict is Verdict.COMPLIANT)


def test_what_does_not_apply_has_no_verdict(judge: Judge) -> None:
    assert judge(project(R=AWAY))["R"].verdict is None


def test_members_of_a_circle_are_open_whatever_their_criteria_say(judge: Judge) -> None:
    found = judge(project(A=below("B", MET), B=below("A", MISSED), N=COVERED, C=f"derived_from: [N, A], {MET}"))
    assert found["A"].verdict is found["B"].verdict is Verdict.OPEN
    assert found["A"].criteria[0].verdict is Verdict.COMPLIANT
    assert found["N"].verdict is Verdict.COMPLIANT


def test_all_limits_of_a_requirement_must_hold(judge: Judge) -> None:
    criteria = (
        "verification: analysis, criteria: [{{response: loop.r, measure: settling_time, band: 2 %, at_most: {}}}, "
        "{{response: loop.r, measure: overshoot, at_most: 0 %}}, {{loop: loop, measure: stable, equals: true}}]"
    )
    found = judge(project(R1=criteria.format("4 s"), R2=criteria.format("3 s")))
    assert found["R1"].verdict is Verdict.COMPLIANT
    assert [one.verdict for one in found["R2"].criteria] == [
        Verdict.NON_COMPLIANT,
        Verdict.COMPLIANT,
        Verdict.COMPLIANT,
    ]
    assert found["R2"].verdict is Verdict.NON_COMPLIANT
    assert found["R2"].reason == "settling_time of loop.r is 3.912 s, and at most 3 s is required"


def test_an_approximation_on_a_requirement_belongs_to_the_measure_that_it_estimates(judge: Judge) -> None:
    body = (
        "verification: analysis, basis: {approximation: first_order_settling, claimed: 4.0 s}, criteria: "
        "[{response: loop.r, measure: overshoot, at_most: 1 %}, "
        "{response: loop.r, measure: settling_time, band: 2 %, at_most: 4 s}]"
    )
    overshoot, settling = judge(project(R=body))["R"].criteria
    assert (overshoot.audit.kind, settling.audit.kind) == ("computed", "approximation")


def test_the_worst_standing_counts(judge: Judge) -> None:
    limit = "{response: loop.r, measure: settling_time, band: 2 %, at_most: 5 s, basis: BASIS}"
    sound = limit.replace("BASIS", "{approximation: first_order_settling, claimed: 4.0 s}")
    wrong = limit.replace("BASIS", "{approximation: second_order_settling, claimed: 4.0 s}")
    found = judge(project(R=f"verification: analysis, criteria: [{sound}, {wrong}]"))["R"]
    assert [one.audit.standing for one in found.criteria] == [Standing.SOUND, Standing.OUT_OF_RANGE]
    assert found.standing is Standing.OUT_OF_RANGE
    assert found.verdict is Verdict.COMPLIANT


def test_what_is_not_answered_is_open_and_says_so(judge: Judge) -> None:
    found = judge(project(R1=OPEN, R2="verification: analysis, decided_by: evidence", R3="verification: analysis"))
    assert [found[name].verdict for name in found] == [Verdict.OPEN] * 3
    assert [len(found[name].unanswered) for name in found] == [1, 0, 0]
    assert found["R2"].reason == "analysis is due and has no record"
    assert found["R3"].reason == "it has no criterion: add one, or say `decided_by: derived` or `evidence`"
