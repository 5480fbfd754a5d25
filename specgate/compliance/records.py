"""Records against limits: what a test or a review shows of a requirement, by the stated rule of decision.

JCGM 106:2012, 8.3: with a guard band w = guard * U beside a limit, a result is accepted where it is inside the limit by
at least w; for an upper limit T that is result <= T - w, for a lower one result >= T + w, for two-sided limits both.
Simple acceptance is w = 0. The rule is binary: what is not accepted does not comply.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from flint import arb, fmpq

from specgate.analysis.analyses import Study
from specgate.approximations.figures import combined, smallest
from specgate.compliance.assessment import CriterionAssessment, Disagreement, RecordAssessment
from specgate.compliance.compare import sign, worst
from specgate.compliance.readings import PI_DECIDES
from specgate.compliance.scales import Bounds, bounds, difference, distance, on_scale, times
from specgate.compliance.wording import figure, limit_words, subject
from specgate.project.parameters import Values
from specgate.project.percent import relative_to_change
from specgate.project.types import DecisionRule, Evidence, Limit, ModelAgreement, Project, Value
from specgate.response.answers import Answer
from specgate.terms.expressions import literal_unit
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Standing, Verdict

_OUTCOMES = {"meets": Verdict.COMPLIANT, "does_not_meet": Verdict.NON_COMPLIANT}


@record
class Measured:
    """The results of one record on the scale of a criterion; `spread` is their expanded uncertainty."""

    unit: Unit
    results: tuple[Answer, ...]
    spread: Answer | None
    bounds: Bounds


@record
class Records:
    """Judges the records of a project: values are those of the nominal study, `again` those with more digits of pi."""

    project: Project
    nominal: Study
    again: Study

    def assess(self, name: str, evidence: Evidence, criteria: Sequence[CriterionAssessment]) -> RecordAssessment:
        """Judge a record by the criteria of a requirement; results are of one of them, an outcome may be of all."""
        revision = self.project.info.revision
        stale = evidence.design_revision is not None and evidence.design_revision != revision
        if evidence.outcome is not None:
            return RecordAssessment(evidence, _OUTCOMES[evidence.outcome], stale)
        hit = [one for one in criteria if evidence.about(name, one.criterion)]
        if len(hit) != 1 or hit[0].criterion.limit.truth is not None:
            reason = "it has results, and there is no limit to compare them with: say `outcome`"
            return RecordAssessment(evidence, Verdict.OPEN, stale, reason)
        return self._measured(evidence, hit[0], stale)

    def under(self, judged: RecordAssessment, limits: Sequence[Limit]) -> Verdict:
        """Judge a record with results by other limits than those of its criterion; sides not named stay as they are."""
        assert judged.criterion is not None
        first, second = (
            self._decide(self._read(judged.evidence, judged.criterion, study.values, limits))
            for study in (self.nominal, self.again)
        )
        return first if first is second else Verdict.OPEN

    def _measured(self, evidence: Evidence, criterion: CriterionAssessment, stale: bool) -> RecordAssessment:
        rule = self.project.decision_rule
        measured = self._read(evidence, criterion, self.nominal.values)
        if rule.kind == "guarded_acceptance" and measured.spread is None:
            reason = "its expanded uncertainty is not stated, and the rule of decision needs it"
            return RecordAssessment(evidence, Verdict.OPEN, stale, reason, criterion, measured.unit)
        verdict = self._decide(measured)
        if verdict is not self._decide(self._read(evidence, criterion, self.again.values)):
            return RecordAssessment(evidence, Verdict.OPEN, stale, PI_DECIDES, criterion, measured.unit)
        number, reserve = _worst(measured)
        return RecordAssessment(
            evidence,
            verdict,
            stale,
            None if verdict is Verdict.COMPLIANT else _reason(measured, number, criterion, evidence, rule),
            criterion,
            measured.unit,
            measured.results,
            measured.spread,
            number,
            reserve,
            self._disagreement(measured, criterion),
        )

    def _read(
        self, evidence: Evidence, criterion: CriterionAssessment, values: Values, limits: Sequence[Limit] = ()
    ) -> Measured:
        unit, span = criterion.unit or ONE, criterion.span
        own = bounds(criterion.criterion.limit, unit, values, span)
        for limit in reversed(limits):
            own = bounds(limit, unit, values, span).beside(own)
        spread = evidence.expanded_uncertainty
        return Measured(
            unit,
            tuple(on_scale(value, unit, values, span) for value in evidence.results),
            None if spread is None else on_scale(spread, unit, values, span),
            own,
        )

    def _decide(self, measured: Measured) -> Verdict:
        """Return the verdict on the worst result."""
        guard = self.project.decision_rule.guard
        width = Answer.of_exact(fmpq(0)) if measured.spread is None else times(guard, measured.spread)
        found = [
            sign(difference(left, width), fmpq(0))
            for result in measured.results
            for left in _left(result, measured.bounds)
        ]
        return worst(
            Verdict.OPEN if one is None else Verdict.NON_COMPLIANT if one < 0 else Verdict.COMPLIANT for one in found
        )

    def _disagreement(self, measured: Measured, criterion: CriterionAssessment) -> Disagreement | None:
        """Return the result that is further from the computed value than uncertainty and agreement let it be."""
        agreement, unit = self.project.model_agreement, measured.unit
        computed = criterion.reading.settled
        if agreement is None or computed.absent is not None or computed.truth is not None:
            return None
        model = criterion.reading.in_unit(unit)
        allowed = _allowed(agreement, model, unit, self.nominal.values)
        if allowed is None:
            return None
        allowed = allowed if measured.spread is None else difference(allowed, measured.spread, -1)
        beyond = [one for one in measured.results if sign(difference(distance(one, model), allowed), fmpq(0)) == 1]
        if not beyond:
            return None
        return Disagreement(max(beyond, key=lambda one: float(distance(one, model).enclose(64).mid())), model, allowed)


def resting(criterion: CriterionAssessment, records: Sequence[RecordAssessment]) -> CriterionAssessment:
    """Return a criterion with the standing of the record that it rests on, and its verdict where analysis has none."""
    audit = criterion.audit
    if audit.kind != "evidence":
        return criterion
    record = next((one for one in records if one.evidence.id == audit.evidence), None)
    if record is None:
        return replace(criterion, audit=replace(audit, reason=f"{audit.evidence} does not name this requirement"))
    if record.stale or record.verdict is Verdict.OPEN:
        return replace(criterion, audit=replace(audit, reason=record_words(record)))
    sound = replace(criterion, audit=replace(audit, standing=Standing.SOUND, reason=None))
    if criterion.verdict is not Verdict.OPEN:
        return sound
    return replace(sound, verdict=record.verdict, reason=record_words(record))


def record_words(one: RecordAssessment) -> str:
    """Say what a record shows where it does not show compliance."""
    evidence = one.evidence
    if one.stale:
        return f"{evidence.id} is on revision {evidence.design_revision} of the design"
    if one.verdict is Verdict.OPEN:
        return f"{evidence.id} decides nothing: {one.reason}"
    name = evidence.kind.replace("_", " ")
    return f"by the {name} {evidence.id} {one.reason or 'it is not met'}"


def _left(result: Answer, limits: Bounds) -> list[Answer]:
    """Return the distances from the limits, positive inside."""
    left = [] if limits.least is None else [difference(result, limits.least)]
    return left if limits.most is None else [*left, difference(limits.most, result)]


def _worst(measured: Measured) -> tuple[Answer, Answer]:
    """Return the result that is nearest to, or furthest beyond, a limit, and its distance from it."""
    pairs = [(result, smallest(_left(result, measured.bounds))) for result in measured.results]
    return min(pairs, key=lambda pair: float(pair[1].enclose(64).mid()))


def _allowed(agreement: ModelAgreement, model: Answer, unit: Unit, values: Values) -> Answer | None:
    """Return the distance from the model that is borne, on the scale of the result; None where it is of another kind.

    A part of a ratio in decibels is a factor: 10 % are 20 log10(1.1) dB.
    """
    fraction = relative_to_change(agreement.at_most)
    if fraction is not None:
        if unit.kind == "decibel":
            return combined(lambda one: 20 * one.log() / arb.const_log10(), Answer.of_exact(1 + fraction))
        return times(fraction, distance(model, Answer.of_exact(fmpq(0))))
    return on_scale(agreement.at_most, unit, values) if _same_kind(agreement.at_most, unit) else None


def _same_kind(value: Value, unit: Unit) -> bool:
    written = literal_unit(value.expression) or ONE
    decibel = (written.kind == "decibel", unit.kind == "decibel")
    return written.dimension == unit.dimension and written.angle == unit.angle and decibel[0] is decibel[1]


def _reason(
    measured: Measured, number: Answer, criterion: CriterionAssessment, evidence: Evidence, rule: DecisionRule
) -> str:
    shown = figure(number, measured.unit, digits=6)
    wanted = limit_words(criterion.criterion.limit)
    inside = all(sign(left, fmpq(0)) in (0, 1) for left in _left(number, measured.bounds))
    if not inside or evidence.expanded_uncertainty is None:
        return f"{subject(criterion)} was found to be {shown}, and {wanted} is required"
    times_guard = "" if rule.guard == 1 else f"{float(rule.guard.p) / float(rule.guard.q):g} times "
    return (
        f"{subject(criterion)} was found to be {shown}, and {wanted} is required with a guard band of {times_guard}its "
        f"expanded uncertainty of {evidence.expanded_uncertainty.as_written}"
    )
