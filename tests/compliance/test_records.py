"""Records against limits: the rule of decision at its edges, each kind of limit on its own side, decibels as decibels.

JCGM 106:2012, 8.3: an upper limit T is met by a result of at most T - w, a lower one by at least T + w, w = guard * U.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest

from specgate.compliance.assessment import Assessment
from specgate.terms.verdicts import Standing, Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

PROJECT = """
    specgate: 1
    project: {{id: E-1, title: Evidence, revision: A, stage: CDR, stages: [CDR, acceptance]}}
    subsystems:
      lag: {{input: {{unit: V}}, output: {{unit: V}}, model: {{numerator: [1], denominator: [1 s, 1]}}}}
      integrator: {{input: {{unit: V}}, output: {{unit: V}}, model: {{gain: 1 1/s, integrators: 1}}}}
    loops:
      loop:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: lag(u)}}
        responses: {{r: {{from: u, to: y, input: step, size: 1 V}}}}
      closed:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: integrator(u - z), z: lag(y)}}
        breaks: {{b: y}}
        responses: {{r: {{from: u, to: z, input: step, size: 1 V}}}}
    requirements:
      R:
        text: It shall.
        verification: {verification}
        {criterion}
    evidence:
      {evidence}
    decision_rule: {rule}
    """
VALUE = "criterion: {{response: loop.r, measure: value_at, time: 60 s, {limit}}}"
MARGIN = "criterion: {{break: closed.b, measure: phase_margin, {limit}}}"
SIMPLE, GUARDED, HALF = (
    "{kind: simple_acceptance}",
    "{kind: guarded_acceptance, guard: 1.0}",
    "{kind: guarded_acceptance, guard: 0.5}",
)


def record(body: str, name: str = "T-1", kind: str = "test", revision: str = "A") -> str:
    return f"{name}: {{kind: {kind}, requirement: R, design_revision: {revision}, {body}}}"


def found(judge: Judge, criterion: str, *records: str, rule: str = SIMPLE, verification: str = "test") -> Assessment:
    evidence = ("\n" + " " * 6).join(records)
    return judge(PROJECT.format(criterion=criterion, evidence=evidence, rule=rule, verification=verification))["R"]


@pytest.mark.parametrize(
    ("limit", "rule", "edge", "outward"),
    [
        ("between: [0 V, 5 V]", SIMPLE, "5", 1),
        ("between: [0 V, 5 V]", SIMPLE, "0", -1),
        ("between: [0 V, 5 V]", GUARDED, "4.8", 1),
        ("between: [0 V, 5 V]", GUARDED, "0.2", -1),
        ("between: [0 V, 5 V]", HALF, "4.9", 1),
        ("within: 2 V, of: 1 V", GUARDED, "2.8", 1),
        ("within: 2 V, of: 1 V", GUARDED, "-0.8", -1),
        ("within: 2000 mV, of: 1 V", HALF, "-0.9", -1),
        ("at_most: 0 V", GUARDED, "-0.2", 1),
        ("at_least: 0 V", GUARDED, "0.2", -1),
    ],
)
def test_the_edge_complies_and_a_millionth_beyond_it_does_not(
    judge: Judge, limit: str, rule: str, edge: str, outward: int
) -> None:
    beyond = f"{float(edge) + outward * 1e-6:.7f}"
    for result, verdict in ((edge, Verdict.COMPLIANT), (beyond, Verdict.NON_COMPLIANT)):
        inside = "-1 V" if limit == "at_most: 0 V" else "1 V"
        body = f"results: [{inside}, {result} V], expanded_uncertainty: 200 mV"
        (shown,) = found(judge, VALUE.format(limit=limit), record(body), rule=rule).records
        assert shown.verdict is verdict, result


@pytest.mark.parametrize(
    ("result", "rule", "verdict"),
    [
        ("6 dB", SIMPLE, Verdict.COMPLIANT),
        ("5.999999 dB", SIMPLE, Verdict.NON_COMPLIANT),
        ("6.5 dB", GUARDED, Verdict.COMPLIANT),
        ("6.499999 dB", GUARDED, Verdict.NON_COMPLIANT),
        ("6.25 dB", HALF, Verdict.COMPLIANT),
        ("6.249999 dB", HALF, Verdict.NON_COMPLIANT),
    ],
)
def test_decibels_are_compared_as_they_are_written(judge: Judge, result: str, rule: str, verdict: Verdict) -> None:
    criterion = "criterion: {break: closed.b, measure: gain_margin, at_least: 6 dB}"
    body = f"results: [{result}], expanded_uncertainty: 0.5 dB"
    assert found(judge, criterion, record(body), rule=rule).records[0].verdict is verdict


def test_units_of_one_dimension_are_converted(judge: Judge) -> None:
    limit = MARGIN.format(limit="at_least: 45 deg")
    assert found(judge, limit, record("results: [0.7853981633974483 rad]")).verdict is Verdict.NON_COMPLIANT
    assert found(judge, limit, record("results: [0.7853981633974484 rad]")).verdict is Verdict.COMPLIANT
    assert found(judge, limit, record("results: [pi * 1 rad / 4]")).verdict is Verdict.COMPLIANT


def test_the_worst_result_is_shown_with_what_it_leaves(judge: Judge) -> None:
    shown = found(judge, VALUE.format(limit="between: [0 V, 5 V]"), record("results: [2 V, 4.5 V, 1 V]")).records[0]
    assert shown.worst is not None
    assert shown.reserve is not None
    assert (str(shown.worst.exact), str(shown.reserve.exact)) == ("9/2", "1/2")


MET = VALUE.format(limit="between: [0 V, 5 V]")


@pytest.mark.parametrize(
    ("records", "verification", "verdict", "outcomes"),
    [
        ([record("outcome: meets")], "test", Verdict.COMPLIANT, [Verdict.COMPLIANT]),
        ([record("outcome: does_not_meet")], "test", Verdict.NON_COMPLIANT, [Verdict.NON_COMPLIANT]),
        ([record("outcome: meets"), record("results: [6 V]", "T-2")], "test", Verdict.NON_COMPLIANT, None),
        ([record("outcome: meets", revision="B")], "[analysis, test]", Verdict.OPEN, [Verdict.COMPLIANT, Verdict.OPEN]),
        ([record("outcome: does_not_meet", revision="B")], "analysis", Verdict.COMPLIANT, None),
        ([record("outcome: does_not_meet")], "analysis", Verdict.NON_COMPLIANT, [Verdict.COMPLIANT]),
        ([record("outcome: meets", kind="inspection")], "test", Verdict.OPEN, ["no_record"]),
        ([record("outcome: meets", revision="B"), record("outcome: meets", "T-2")], "test", Verdict.COMPLIANT, None),
        (
            [record("outcome: meets")],
            "[analysis, {method: test, stage: acceptance}]",
            Verdict.COMPLIANT,
            [Verdict.COMPLIANT, Verdict.COMPLIANT],
        ),
        (
            [record("outcome: meets", revision="B")],
            "[analysis, {method: test, stage: acceptance}]",
            Verdict.COMPLIANT,
            [Verdict.COMPLIANT, "due_later"],
        ),
        ([record("outcome: does_not_meet")], "[{method: test, stage: acceptance}]", Verdict.NON_COMPLIANT, None),
    ],
)
def test_methods_conclude_by_their_records(
    judge: Judge, records: list[str], verification: str, verdict: Verdict, outcomes: list[object] | None
) -> None:
    judged = found(judge, MET, *records, verification=verification)
    assert judged.verdict is verdict
    assert judged.due
    assert outcomes is None or [one.outcome for one in judged.methods] == outcomes


@pytest.mark.parametrize(
    ("criterion", "agreement", "far", "near"),
    [
        # 1 - exp(-60) is the value; it rounds to 1 V in 20 digits
        (MET, "10 %", "1.300001 V", "1.299999 V"),
        (MET, "10 %", "0.699999 V", "0.700001 V"),
        (MET, "100 mV", "1.300001 V", "1.299999 V"),
        (MET, "1 s", None, "4 V"),
    ],
)
def test_a_result_far_from_the_model(judge: Judge, criterion: str, agreement: str, far: str | None, near: str) -> None:
    for result, disagrees in ((far, True), (near, False)):
        if result is None:
            continue
        rule = f"{SIMPLE}\n    model_agreement: {{{{at_most: {agreement}}}}}".replace("{{", "{").replace("}}", "}")
        body = f"results: [1 V, {result}], expanded_uncertainty: 0.2 V"
        (shown,) = found(judge, criterion, record(body), rule=rule).records
        assert (shown.disagreement is not None) is disagrees, result


def test_a_part_of_a_ratio_is_a_factor(judge: Judge) -> None:
    # the loop 1/(s (s + 1)) has a sensitivity peak; a peak that is 1.1 times as high is 0.8279 dB above it
    criterion = "criterion: {break: closed.b, measure: sensitivity_peak, at_most: 10 dB}"
    rule = "{kind: simple_acceptance}\n    model_agreement: {at_most: 10 %}"
    (model,) = found(judge, criterion, record("results: [1 dB]")).criteria
    assert model.unit is not None
    peak = float(model.reading.in_unit(model.unit).enclose(64).mid())
    for beyond, disagrees in ((0.8278, False), (0.8280, True)):
        (shown,) = found(judge, criterion, record(f"results: [{peak + beyond:.6f} dB]"), rule=rule).records
        assert (shown.disagreement is not None) is disagrees


@pytest.mark.parametrize(
    ("body", "standing"),
    [("results: [1 V]", Standing.SOUND), ("results: [6 V]", Standing.SOUND), (None, Standing.INCONCLUSIVE)],
)
def test_a_basis_of_evidence_stands_with_its_record(judge: Judge, body: str | None, standing: Standing) -> None:
    criterion = MET.replace("}", ", basis: {evidence: T-1}}")
    shown = record(body) if body is not None else record("results: [1 V]", revision="B")
    assert found(judge, criterion, shown, verification="[analysis, test]").standing is standing


def test_a_record_decides_what_analysis_does_not(judge: Judge) -> None:
    open_one = MET.replace("}", ", evaluate: worst_case, basis: {evidence: T-1}}")
    for result, verdict in (("1 V", Verdict.COMPLIANT), ("6 V", Verdict.NON_COMPLIANT)):
        judged = found(judge, open_one, record(f"results: [{result}]"), verification="[analysis, test]")
        assert judged.criteria[0].verdict is verdict
        assert judged.verdict is verdict
