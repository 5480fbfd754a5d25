"""The computed response meets a limit and a record does not, or the other way round.

One of them is wrong, or they are not about the same thing. The requirement is not met either way, for every method
that is due must show that it is. The finding restates that: an error where `gate: hold_on` names non_compliant, else
a warning. Put it right by finding out which of them is wrong; where the model is, by correcting it.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Assessment, CriterionAssessment, RecordAssessment
from specgate.compliance.compare import worst
from specgate.compliance.wording import subject
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "evidence-contradicts-analysis"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every record that shows the contrary of what was computed."""
    for name, assessment in facts.assessments.items():
        for one in assessment.records:
            computed = _computed(assessment, one)
            if not one.stale and computed is not None and _contrary(computed, one.verdict):
                shows = "is met" if one.verdict is Verdict.COMPLIANT else "is not met"
                model = "meets" if computed is Verdict.COMPLIANT else "does not meet"
                what, record = _about(assessment.criteria, one), one.evidence.id
                message = (
                    f"{name}: {what} {model} its limit by analysis, and by {record} it {shows}: find out which of them "
                    "is wrong"
                )
                level = facts.restating(Verdict.NON_COMPLIANT, assessment)
                yield Finding(NAME, level, message, one.evidence.place, requirement=name, restates=True)


def _computed(assessment: Assessment, one: RecordAssessment) -> Verdict | None:
    """Return what the model says of what a record is about; None where it says nothing."""
    if one.evidence.kind == "analysis" or assessment.requirement.decided_by == "evidence":
        return None
    about = [each for each in assessment.criteria if one.evidence.about(assessment.requirement.id, each.criterion)]
    about = [one.criterion] if one.criterion is not None else about
    return worst(each.verdict for each in about) if about else None


def _contrary(first: Verdict, second: Verdict) -> bool:
    return first is not second and Verdict.OPEN not in (first, second)


def _about(criteria: tuple[CriterionAssessment, ...], one: RecordAssessment) -> str:
    only = one.criterion or (criteria[0] if len(criteria) == 1 else None)
    return subject(only) if only is not None else "it"


RULE = Rule(
    NAME, "Analysis and record that contradict each other", "error or warning (restates the verdict)", check, __doc__
)
