"""A need that is decided by what is derived from it, and nothing is.

`decided_by: derived` leaves the verdict to the requirements below. Where there are none, or none that applies, nobody
takes the need up and it stays open for ever. Put it right by deriving requirements from it, or by giving it a
criterion of its own.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "requirement-childless"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that waits for others of which there are none."""
    for name, assessment in facts.assessments.items():
        requirement = assessment.requirement
        if requirement.decided_by != "derived" or assessment.verdict is None:
            continue
        children = facts.graph.children[name]
        if all(facts.assessments[child].verdict is None for child in children):
            which = "nothing that applies" if children else "nothing"
            message = (
                f"{name} is decided by what is derived from it, and {which} is: derive requirements from it, or give "
                "it a criterion of its own"
            )
            yield Finding(NAME, Level.ERROR, message, requirement.place, requirement=name)


RULE = Rule(NAME, "Need that nothing is derived from", "error", check, __doc__)
