"""A method of verification is due at this stage and no record of it exists.

A test, a demonstration, an inspection, a review of design or a similarity leaves a record: `evidence` of that kind that
names the requirement. Where the method is due and there is none, the requirement is open. The finding restates that:
an error where `gate: hold_on` names open, else a warning. Methods due at a later stage are counted, not reported.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "verification-without-evidence"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every method that is due and has no record."""
    for name, assessment in facts.assessments.items():
        for one in assessment.methods:
            if one.outcome == "no_record":
                kind = one.method.method
                message = (
                    f"{name}: {kind.replace('_', ' ')} is due and has no record: add evidence of kind {kind}, or "
                    "the stage at which it is due"
                )
                level = facts.restating(Verdict.OPEN, assessment)
                yield Finding(NAME, level, message, one.method.place, requirement=name, restates=True)


RULE = Rule(NAME, "Method that is due and has no record", "error or warning (restates the verdict)", check, __doc__)
