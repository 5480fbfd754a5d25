"""Requirements with their criteria and audits as they stand in a Review."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.analysis.arguments import said
from specgate.approximations.table import APPROXIMATIONS, chain
from specgate.compliance.assessment import (
    Assessment,
    Audit,
    CriterionAssessment,
    MethodAssessment,
)
from specgate.compliance.readings import Reading
from specgate.compliance.reserves import reserve
from specgate.compliance.resting import by_response, models
from specgate.compliance.wording import subject_name
from specgate.project.types import Project
from specgate.response.answers import Answer
from specgate.review.assumptions import assumption, model_assumption
from specgate.review.audited import condition, error_of
from specgate.review.budgets import budget
from specgate.review.masks import mask_of
from specgate.review.pictures import error_curve, separation
from specgate.review.printing import amount, amount_of, as_plain, location, plain_number, result, stated
from specgate.review.records import evidence, waiver
from specgate.review.resting import Resting
from specgate.review.types import (
    BasisReview,
    CriterionReview,
    InsteadReview,
    LimitReview,
    MethodReview,
    RequirementReview,
    ReserveReview,
)
from specgate.review.wanted import Wanted
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Verdict
from specgate.traceability.graph import Graph


def requirement(
    name: str,
    assessment: Assessment,
    project: Project,
    rests: Resting,
    graph: Graph,
    wanted: Wanted,
) -> RequirementReview:
    """Print one requirement."""
    declared = assessment.requirement
    exempt = declared.not_applicable
    return RequirementReview(
        text=declared.text,
        title=declared.title,
        rationale=declared.rationale,
        owner=declared.owner,
        location=location(declared.place),
        derived_from=tuple(link.id for link in declared.derived_from),
        allocated_to=tuple(link.id for link in declared.allocated_to),
        verdict="not_applicable" if assessment.verdict is None else assessment.verdict.value,
        standing=None if assessment.standing is None else assessment.standing.value,
        decided_by=declared.decided_by,
        methods=tuple(_method(one) for one in assessment.methods),
        criteria=tuple(_criterion(one, project, wanted) for one in assessment.criteria),
        assumptions=(
            *(assumption(one, wanted) for criterion in by_response(assessment) for one in criterion.assumptions),
            *(model_assumption(one) for one in models(assessment)),
        ),
        rests_on=rests.of(assessment),
        derived=graph.children[name],
        evidence=tuple(evidence(one) for one in assessment.records),
        waiver=next((waiver(one) for one in assessment.waivers if one.excuses), None),
        waivers=tuple(waiver(one) for one in assessment.waivers),
        budget=None if assessment.budget is None else budget(assessment.budget),
        waived=assessment.waived,
        reason=assessment.reason,
        not_applicable=None
        if exempt is None
        else {"reason": exempt.reason, "approved_by": exempt.approved_by, "approved_on": exempt.approved_on},
        external=None if declared.external is None else as_plain(declared.external),
        coverage=as_plain(declared.coverage) or None,
    )


def _method(assessed: MethodAssessment) -> MethodReview:
    outcome = assessed.outcome
    return MethodReview(
        assessed.method.method,
        assessed.method.stage,
        outcome.value if isinstance(outcome, Verdict) else outcome,
        assessed.records or None,
    )


# --- a criterion --------------------------------------------------------------------------------------------


def _criterion(assessed: CriterionAssessment, project: Project, wanted: Wanted) -> CriterionReview:
    criterion = assessed.criterion
    return CriterionReview(
        measure=assessed.measure.name,
        on=subject_name(assessed),
        arguments=said(criterion),
        limit=_limit(assessed),
        evaluate=criterion.evaluate or project.evaluate,
        verdict=assessed.verdict.value,
        result=result(
            assessed.reading,
            assessed.unit,
            assessed.scale,
            assessed.beside,
            assessed.signal,
            method=assessed.measure.method if wanted.proof else None,
        ),
        reserve=_reserve(assessed),
        basis=_basis(assessed, drawn=wanted.drawn),
        standing=assessed.standing.value,
        location=location(criterion.place),
        mask=mask_of(assessed),
        reason=assessed.reason,
    )


def _limit(assessed: CriterionAssessment) -> LimitReview:
    limit, unit = assessed.criterion.limit, assessed.unit or ONE
    least, most = assessed.least, assessed.most
    if limit.truth is not None:
        return LimitReview(equals=limit.truth)
    texts = [value.as_written for value in limit.values]
    if limit.kind == "equals" and assessed.limits.most is not None:
        return LimitReview(equals=int(assessed.limits.most.p))
    if least is None or most is None:
        return LimitReview(
            at_most=None if most is None else amount(most, unit, texts[0]),
            at_least=None if least is None else amount(least, unit, texts[0]),
        )
    if limit.kind == "between":
        return LimitReview(between=(amount(least, unit, texts[0]), amount(most, unit, texts[1])))
    half = Reading(_mean(most.answer, least.answer, -1), _mean(most.again, least.again, -1))
    centre = Reading(_mean(most.answer, least.answer, 1), _mean(most.again, least.again, 1))
    return LimitReview(within=amount(half, unit, texts[0]), of=amount(centre, unit, texts[1]))


def _mean(high: Answer, low: Answer, sign: int) -> Answer:
    assert high.exact is not None
    assert low.exact is not None
    return Answer.of_exact((high.exact + sign * low.exact) / 2)


def _reserve(assessed: CriterionAssessment) -> ReserveReview | None:
    found = reserve(assessed)
    if found is None:
        return None
    unit = "1" if assessed.unit is None else assessed.unit.symbol
    if found.value is None:
        return ReserveReview(None, unit, None, infinite=True)
    relative = None if found.relative is None else plain_number(found.relative, found.relative_scale)
    return ReserveReview(plain_number(found.value, found.scale), unit, relative)


# --- an audit -----------------------------------------------------------------------------------------------


def _basis(assessed: CriterionAssessment, *, drawn: bool) -> BasisReview:
    audit = assessed.audit
    unit = audit.unit or ONE
    return BasisReview(
        kind=audit.kind,
        standing=audit.standing.value,
        chain=_chain(audit.chain),
        claimed=None
        if audit.claimed is None or audit.claim is None
        else stated(audit.claimed, unit, audit.claim.value.as_written),
        formula=None if audit.formula is None else amount_of(audit.formula, unit),
        formula_text=audit.formula_text,
        error=None if audit.error is None else error_of(audit.error, unit),
        claim_agrees=audit.agrees,
        implied=_implied(audit, unit),
        accuracy=audit.accuracy,
        conditions=tuple(condition(one) for one in audit.conditions),
        instead=_instead(audit, unit),
        reason=audit.reason,
        variant=audit.variant,
        error_curve=error_curve(audit, assessed.arguments) if drawn else None,
        separation=separation(audit, assessed.arguments) if drawn else None,
    )


def _chain(named: tuple[str, ...]) -> tuple[str, ...]:
    """Return the approximations that a basis names, each with its premises before it where it is audited."""
    with_premises = (
        [row.name for row in chain(name)] if name in APPROXIMATIONS else [name] for name in dict.fromkeys(named)
    )
    return tuple(dict.fromkeys(one for names in with_premises for one in names))


def _implied(audit: Audit, unit: Unit) -> Mapping[str, float] | None:
    if audit.implied is None:
        return None
    low, high = (
        None if end.absent is not None else plain_number(Reading.once(end).in_unit(unit)) for end in audit.implied
    )
    if low is None:
        return None
    return {"lower": low} if high is None else {"lower": low, "upper": high}


def _instead(audit: Audit, unit: Unit) -> InsteadReview | None:
    instead = audit.instead
    if instead is None:
        return None
    value = None if instead.value is None else amount_of(instead.value, unit)
    return InsteadReview(instead.name, None if value is None else value.value, unit.symbol, instead.variant)
