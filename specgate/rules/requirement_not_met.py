"""A requirement is not met: the computed response violates one of its limits, or something derived from it is not met.

The verdict comes from the computed response, whatever the claim rests on. Put it right by changing the design, or
the limit with those who own it. The finding restates the verdict: it is an error where `gate: hold_on` names
non_compliant, else a warning; a note where its methods are all due at a later stage. It does not hold the gate by
itself.
"""

from __future__ import annotations

from collections.abc import Iterator

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
                message=f"{name} is not met: {assessment.reason}",
                place=assessment.requirement.place,
                requirement=name,
                restates=True,
            )


RULE = Rule(NAME, "Requirement not met", "error, warning or note (restates the verdict)", check, __doc__)
