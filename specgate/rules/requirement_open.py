"""A requirement is open: nothing decides it yet.

It has no criterion, a method that is due has no record, a requirement derived from it is open, its coverage is not
confirmed, or its measure cannot be decided. The message says which. A requirement whose methods are all due at a
later stage is open too, and does not hold this review: the finding is a note then. Otherwise the finding restates
the verdict: an error where `gate: hold_on` names open, else a warning, and it does not hold the gate by itself.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "requirement-open"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that is open."""
    for name, assessment in facts.assessments.items():
        if assessment.verdict is Verdict.OPEN:
            yield Finding(
                rule=NAME,
                level=facts.restating(Verdict.OPEN, assessment),
                message=f"{name} is open: {assessment.reason}",
                place=assessment.requirement.place,
                requirement=name,
                restates=True,
            )


RULE = Rule(NAME, "Requirement open", "error, warning or note (restates the verdict)", check, __doc__)
