"""A requirement at the end of the trace is allocated to nothing.

In a project that uses `allocated_to` at all, every requirement from which nothing is derived names the loops or
subsystems that have to meet it; else nobody in particular does. Put it right by naming them in `allocated_to`.
Requirements that do not apply, and those that wait for others to be derived from them, are left out.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "requirement-unallocated"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement at the end of the trace that is allocated to nothing."""
    requirements = facts.project.requirements
    if not any(requirement.allocated_to for requirement in requirements.values()):
        return
    for requirement in facts.leaves():
        if not requirement.allocated_to:
            message = f"{requirement.id} is allocated to nothing: name the loop or subsystem that has to meet it"
            yield Finding(NAME, Level.WARNING, message, requirement.place, requirement=requirement.id)


RULE = Rule(NAME, "Requirement that nobody has to meet", "warning", check, __doc__)
