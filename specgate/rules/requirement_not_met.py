"""A requirement is not met: a computed value or a record violates a limit, or something derived from it is not met.

The verdict comes from the computed response and the records, whatever the claim rests on. Put it right by changing the
design, or the limit with those who own it. The finding restates the verdict: it is an error where `gate: hold_on` names
non_compliant, else a warning; a note where its methods are all due at a later stage, and where a waiver accepts it. It
does not hold the gate by itself.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Assessment
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "requirement-not-met"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that is non_compliant."""
    for name, assessment in facts.assessments.items():
        if assessment.verdict is Verdict.NON_COMPLIANT:
            yield Finding(
                rule=NAME,
                level=facts.restating(Verdict.NON_COMPLIANT, assessment),
                message=f"{name} is not met{_waived(assessment)}: {assessment.reason}",
                place=assessment.requirement.place,
                requirement=name,
                restates=True,
            )


def _waived(assessment: Assessment) -> str:
    """Say by which waivers that is accepted, or that it is accepted of what is derived from it."""
    if not assessment.waived:
        return ""
    own = [one.waiver.id for one in assessment.waivers if one.excuses]
    return (
        f", which {' and '.join(own)} {'accepts' if len(own) == 1 else 'accept'}"
        if own
        else ", which is waived below it"
    )


RULE = Rule(NAME, "Requirement not met", "error, warning or note (restates the verdict)", check, __doc__)
