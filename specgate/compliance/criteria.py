"""One criterion to its assessment: what is read, in which unit, against which limit, on which basis."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from specgate.analysis.analyses import Analyses, Missing
from specgate.approximations.late import derived_for
from specgate.approximations.table import APPROXIMATIONS, LATER
from specgate.compliance.asking import Asked, ask
from specgate.compliance.assessment import Audit, CriterionAssessment, Unanswered
from specgate.compliance.assumptions import Assumptions
from specgate.compliance.audit import Matter, audit, audit_beyond
from specgate.compliance.compare import Comparison, Limits, compare
from specgate.compliance.model.assumed import ModelAssumptions
from specgate.compliance.readings import PI_DECIDES, Reading
from specgate.compliance.thresholds import Policy
from specgate.compliance.units import default_unit, is_plain, limit_unit, smallness
from specgate.measures.measure import Measure, Reader
from specgate.measures.subjects import ResponseSubject
from specgate.measures.table import MEASURES
from specgate.project.types import Basis, Criterion, Limit, Project
from specgate.response.answers import Answer
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Standing, Verdict

_KEPT = {"cases": "a list of cases (`cases`)"}
_LATER = "not answered by this version"


class Criteria:
    """Judges the criteria of one project; each question is decided again with more digits of pi where those matter."""

    def __init__(self, project: Project, analyses: Analyses, policy: Policy, assumptions: Assumptions) -> None:
        self.project, self.analyses, self.policy, self.assumptions = project, analyses, policy, assumptions
        self.model = ModelAssumptions(project, analyses)

    def assess(self, criterion: Criterion, basis: Basis | None) -> CriterionAssessment:
        """Judge one criterion; `basis` None means computed."""
        measure = MEASURES[criterion.measure]
        nominal = ask(self.analyses.nominal, criterion, measure)
        again = ask(self.analyses.again, criterion, measure)
        again = nominal if again.same_as(nominal) else again
        unanswered = tuple(self._unanswered(criterion, measure, basis, nominal))
        deciding = next((one for one in unanswered if one.decides), None)
        reading = _reading(nominal, again, measure.read, deciding)
        comparison = _compared(nominal, again, reading)
        unit = self._unit(nominal)
        return CriterionAssessment(
            criterion=criterion,
            measure=measure,
            arguments=nominal.arguments,
            reading=reading,
            limits=nominal.limits,
            limits_again=again.limits,
            unit=unit,
            scale=smallness(measure, nominal.arguments, nominal.subject, unit),
            verdict=comparison.verdict,
            audit=self._audit(nominal, again, basis, reading, unit or ONE),
            reason=comparison.reason,
            beside=_reading(nominal, again, measure.beside, deciding) if measure.beside else None,
            unanswered=unanswered,
            signal=nominal.signal,
            span=nominal.span,
            assumptions=self.assumptions.of(criterion.subject),
            model=self.model.of(criterion.subject, (nominal.arguments, again.arguments), reading),
        )

    def under(self, assessed: CriterionAssessment, limits: Sequence[Limit]) -> Verdict:
        """Judge what was read by other limits; sides that they do not name stay as they are."""
        first, second = assessed.limits, assessed.limits_again
        nominal = ask(self.analyses.nominal, assessed.criterion, assessed.measure)
        for limit in limits:
            relaxed = replace(assessed.criterion, limit=limit)
            first = _beside(ask(self.analyses.nominal, relaxed, assessed.measure).limits, first)
            second = _beside(ask(self.analyses.again, relaxed, assessed.measure).limits, second)
        verdict = compare(assessed.reading.answer, first, nominal.at_limit).verdict
        again = compare(assessed.reading.again, second, nominal.at_limit).verdict
        return verdict if verdict is again else Verdict.OPEN

    def _unit(self, asked: Asked) -> Unit | None:
        """Return the unit of the limit, else that of the measure; None for whole numbers and yes/no."""
        otherwise = default_unit(asked.measure, asked.arguments, asked.signal)
        limit, values = asked.criterion.limit, asked.study.values
        if otherwise is not None and otherwise.kind == "decibel" and is_plain(limit, values):
            return ONE
        return otherwise and (limit_unit(limit, values) or otherwise)

    def _unanswered(
        self, criterion: Criterion, measure: Measure, basis: Basis | None, asked: Asked
    ) -> Iterator[Unanswered]:
        place, evaluate = criterion.place, criterion.evaluate or self.project.evaluate
        if measure.read is None:
            yield Unanswered(place, _LATER)
        elif isinstance(asked.subject, Missing) and asked.subject.later:
            yield Unanswered(place, asked.subject.reason)
        if evaluate != "nominal":
            yield Unanswered(place, f"`evaluate: {evaluate}` is {_LATER}")
        for key, what in _KEPT.items():
            if key in criterion.kept and measure.read is not None:
                yield Unanswered(place, f"{what} is {_LATER}")
        if basis is not None and basis.kind == "approximation" and any(name in LATER for name in basis.chain):
            named = ", ".join(name for name in basis.chain if name in LATER)
            yield Unanswered(basis.place, f"the approximation {named} is not audited by this version", decides=False)

    def _audit(self, nominal: Asked, again: Asked, basis: Basis | None, reading: Reading, unit: Unit) -> Audit:
        if basis is None or basis.kind == "computed":
            return Audit("computed", Standing.SOUND, basis.place if basis else nominal.criterion.place)
        if basis.kind == "evidence":
            return Audit("evidence", Standing.INCONCLUSIVE, basis.place, evidence=basis.evidence)
        subject = nominal.subject
        beyond = subject.beyond if isinstance(subject, ResponseSubject) else None
        if isinstance(subject, ResponseSubject) and beyond is not None and not _derived_for(basis, subject):
            return audit_beyond(basis, beyond, reading, nominal.study.values, unit)
        viewed = nominal.viewed
        precise = viewed if again is nominal else again.viewed
        if viewed is None or precise is None:
            reason = nominal.subject.reason if isinstance(nominal.subject, Missing) else "there is nothing to look at"
            return Audit("approximation", Standing.INCONCLUSIVE, basis.place, reason, chain=basis.chain)
        matter = Matter(viewed, precise, nominal.arguments, reading, nominal.limits, nominal.study.values, unit)
        return audit(basis, matter, self.policy)


def _derived_for(basis: Basis, subject: ResponseSubject) -> bool:
    """Whether every link of a basis is derived for a response; one that is not audited yet is taken as it is."""
    rows = [APPROXIMATIONS[name] for name in basis.chain if name in APPROXIMATIONS]
    return all(derived_for(subject, row.inputs, late=row.late) for row in rows)


def _reading(nominal: Asked, again: Asked, read: Reader | None, deciding: Unanswered | None) -> Reading:
    if deciding is not None or read is None:
        return Reading.once(Answer.undecided(deciding.what if deciding else _LATER))
    answer = nominal.read(read)
    return Reading.once(answer) if again is nominal else Reading(answer, again.read(read))


def _beside(relaxed: Limits, own: Limits) -> Limits:
    return Limits(
        own.least if relaxed.least is None else relaxed.least,
        own.most if relaxed.most is None else relaxed.most,
        own.truth if relaxed.truth is None else relaxed.truth,
    )


def _compared(nominal: Asked, again: Asked, reading: Reading) -> Comparison:
    first = compare(reading.answer, nominal.limits, nominal.at_limit)
    if again is nominal:
        return first
    second = compare(reading.again, again.limits, again.at_limit)
    return first if first.verdict is second.verdict else Comparison(Verdict.OPEN, PI_DECIDES)
