"""A requirement is to be verified by analysis and has nothing that could be analysed.

Analysis needs a criterion (a measure with a limit), a budget, requirements derived from it, or a record of an analysis
done elsewhere (`evidence` of kind analysis). Without any of them the requirement stays open. The finding restates that:
an error where `gate: hold_on` names open, else a warning; a note where the analysis is due at a later stage.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.project.types import Requirement
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level, Verdict

NAME = "verification-without-criterion"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every analysis that has no criterion."""
    for name, assessment in facts.assessments.items():
        requirement = assessment.requirement
        planned = [one for one in assessment.methods if one.method.method == "analysis"]
        if not planned or assessment.verdict is None or _analysable(requirement, facts):
            continue
        later = all(one.outcome == "due_later" for one in planned)
        level = Level.NOTE if later else facts.restating(Verdict.OPEN, assessment)
        message = f"{name} is to be verified by analysis and has no criterion: say which measure has which limit"
        yield Finding(NAME, level, message, planned[0].method.place, requirement=name, restates=True)


def _analysable(requirement: Requirement, facts: Facts) -> bool:
    recorded = (one for one in facts.project.evidence.values() if requirement.id in one.requirements)
    return (
        bool(requirement.criteria)
        or requirement.budget is not None
        or requirement.decided_by == "derived"
        or any(one.kind == "analysis" for one in recorded)
    )


RULE = Rule(NAME, "Analysis of nothing in particular", "error, warning or note (restates the verdict)", check, __doc__)
