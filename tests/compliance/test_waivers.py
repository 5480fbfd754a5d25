"""Waivers: in force or not, needed or not, enough or not; revisions in their order."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest

from specgate.compliance.assessment import Assessment
from specgate.compliance.waivers import earlier
from specgate.terms.verdicts import Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

PROJECT = """
    specgate: 1
    project: {{id: W-1, title: Waivers, revision: A, date: 2026-11-02}}
    subsystems:
      lag: {{input: {{unit: V}}, output: {{unit: V}}, model: {{numerator: [1], denominator: [1 s, 1]}}}}
    loops:
      loop:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: lag(u)}}
        responses: {{r: {{from: u, to: y, input: step, size: 1 V}}}}
    requirements:
      N: {{text: Need., decided_by: derived, coverage: {{complete: true}}}}
      R:
        text: It shall.
        derived_from: [N]
        verification: analysis
        criteria:
          - {{response: loop.r, measure: settling_time, band: 2 %, at_most: 3.9 s}}
          - {{response: loop.r, measure: final_value, between: [1.5 V, 1.6 V]}}
    waivers:
      {waivers}
    """


def waiver(name: str, accepts: str, more: str = "") -> str:
    approved = "approved_by: Chief engineer, approved_on: 2026-10-20"
    return f"{name}: {{kind: waiver, requirement: R, reason: So., accepts: {{{accepts}}}, {approved}{more}}}"


def found(judge: Judge, *waivers: str) -> Mapping[str, Assessment]:
    return judge(PROJECT.format(waivers=("\n" + " " * 6).join(waivers)))


TIME, VALUE = "at_most: 4 s", "between: [1 V, 1.6 V]"


@pytest.mark.parametrize(
    ("accepted", "waived", "excusing"),
    [
        ([TIME, VALUE], True, [True, True]),
        ([TIME], False, [True]),
        (["at_most: 3.913 s", VALUE], True, [True, True]),
        (["at_most: 3.912 s", VALUE], False, [False, True]),
        # the side that is not named stays: 1 V is inside [1 V, 1.6 V]
        ([TIME, "at_least: 1 V"], True, [True, True]),
        ([TIME, "at_least: 1.000001 V"], False, [True, False]),
        ([TIME, "at_most: 2 V"], False, [True, False]),
    ],
)
def test_every_limit_that_is_missed_needs_its_waiver(
    judge: Judge, accepted: list[str], waived: bool, excusing: list[bool]
) -> None:
    judged = found(judge, *(waiver(f"W-{number}", accepts) for number, accepts in enumerate(accepted)))
    assert judged["R"].verdict is Verdict.NON_COMPLIANT
    assert judged["R"].waived is waived
    assert [one.excuses for one in judged["R"].waivers] == excusing
    assert judged["N"].verdict is Verdict.NON_COMPLIANT
    assert judged["N"].waived is waived


def test_a_waiver_is_for_the_measure_that_it_names(judge: Judge) -> None:
    named = waiver("W-1", "at_least: 1 V", ", measure: final_value, on: loop.r")
    first, second = found(judge, named, waiver("W-2", TIME))["R"].waivers
    assert (first.needed, first.excuses, second.excuses) == (True, True, True)


@pytest.mark.parametrize(
    ("revision", "other"),
    [("A", "B"), ("B", "AA"), ("1", "2"), ("2", "10"), ("A1", "A2"), ("A", "A1"), ("1.9", "1.10"), ("a", "B")],
)
def test_revisions_in_their_order(revision: str, other: str) -> None:
    assert earlier(revision, other)
    assert not earlier(other, revision)
    assert not earlier(revision, revision)
