"""A requirement is allocated to something that has no part in showing it.

A subsystem that is in no loop can meet nothing. And where a requirement has criteria, one of them is about each loop
that it is allocated to, and about a loop that uses each subsystem that it is allocated to: an allocation that no
criterion looks at is a promise that nobody checks. Put it right by correcting the name, by adding the criterion, or by
deriving a requirement of its own for that part.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.project.types import Link, Requirement
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "allocation-unused"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every allocation that no loop, or no criterion of the requirement, has to do with."""
    uses = {name: frozenset(loop.subsystems) for name, loop in facts.analyses.loops.items()}
    used = frozenset(block for blocks in uses.values() for block in blocks)
    for requirement in facts.project.requirements.values():
        if requirement.not_applicable is not None:
            continue
        about = {criterion.subject.loop for criterion in requirement.criteria}
        looked_at = about.union(*(uses[loop] for loop in about))
        for link in requirement.allocated_to:
            if link.id in facts.project.subsystems and link.id not in used:
                yield _finding(requirement, link, "which is in no loop: wire it into one, or correct the name")
            elif about and _known(link, facts) and link.id not in looked_at:
                remedy = "add one, derive a requirement for that part, or correct the name"
                yield _finding(requirement, link, f"and none of its criteria is about that: {remedy}")


def _known(link: Link, facts: Facts) -> bool:
    return link.id in facts.project.loops or link.id in facts.project.subsystems


def _finding(requirement: Requirement, link: Link, what: str) -> Finding:
    message = f"{requirement.id} is allocated to {link.id}, {what}"
    return Finding(NAME, Level.WARNING, message, link.place, requirement=requirement.id)


RULE = Rule(NAME, "Allocation to something that does not show it", "warning", check, __doc__)
