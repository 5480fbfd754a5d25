"""The specification asks for something that the format allows and this version does not answer.

It is read, checked for its form, kept, and never approximated: a verdict that needs it is open, and what would only
qualify a verdict (a waiver, a linear range) is said here so that nobody takes it for applied. The finding is a
note; where a verdict is open because of it, requirement-open says so with its own level.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "not-answered-yet"


def check(facts: Facts) -> Iterator[Finding]:
    """Report what stays unanswered, requirement by requirement, then for the project."""
    for name, assessment in facts.assessments.items():
        for unanswered in assessment.unanswered:
            yield Finding(
                rule=NAME,
                level=Level.NOTE,
                message=f"{name}: {unanswered.what}",
                place=unanswered.place,
                requirement=name,
            )


RULE = Rule(NAME, "Not answered by this version", "note", check, __doc__)
