"""The gate: passes or holds, by the project's policy over verdicts, standings and findings; each reason a sentence."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.compliance.assessment import Assessment
from specgate.compliance.range_words import standing_words
from specgate.project.types import GatePolicy
from specgate.review.types import GateReview
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level, Standing, Verdict

_WORDS = {
    Verdict.NON_COMPLIANT.value: "not met",
    Verdict.OPEN.value: "open",
    Standing.OUT_OF_RANGE.value: "rests on an approximation outside its range",
    Standing.INCONCLUSIVE.value: "rests on a basis that does not decide it",
}


def gate(policy: GatePolicy, assessments: Mapping[str, Assessment], findings: tuple[Finding, ...]) -> GateReview:
    """Return the outcome and what holds it."""
    reasons = (*_verdicts(policy, assessments), *_errors(findings))
    return GateReview("hold" if reasons else "pass", reasons)


def _verdicts(policy: GatePolicy, assessments: Mapping[str, Assessment]) -> Iterator[str]:
    for name, assessment in assessments.items():
        if not assessment.due or assessment.verdict is None:
            continue
        if assessment.verdict.value in policy.hold_on and not assessment.waived:
            why = f": {assessment.reason}" if assessment.reason else ""
            yield f"{name} is {_WORDS[assessment.verdict.value]}{why}"
        standing = None if assessment.standing_waived else assessment.standing
        if standing is not None and standing.value in policy.hold_on:
            yield from (f"{name} {words}" for words in _why(assessment, standing))


def _why(assessment: Assessment, standing: Standing) -> Iterator[str]:
    """Say what a standing comes from: the bases of the requirement, or the ranges of signals."""
    if any(one.audit.standing is standing for one in assessment.criteria):
        yield _WORDS[standing.value]
    beyond = [one for one in assessment.criteria if one.audit.standing is not one.standing is standing]
    if beyond:
        ranges = standing_words([one for one in beyond[0].assumptions if one.standing is standing])
        models = (one.words for one in beyond[0].model if one.standing is standing)
        yield f"rests on a model that does not hold: {ranges or next(models, '')}"


def _errors(findings: tuple[Finding, ...]) -> Iterator[str]:
    """Yield the errors that do not only restate a verdict or a standing."""
    for finding in findings:
        if finding.level is Level.ERROR and not finding.restates:
            yield f"{finding.message} ({finding.place})"
