"""A link points to nothing: `derived_from` names no requirement, or `allocated_to` neither a loop nor a subsystem.

Put it right by correcting the name, or by adding what it names. A requirement that comes from a document outside
the project says so with `external`.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.names import nearest
from specgate.terms.verdicts import Level

NAME = "dangling-link"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every link to something that the specification does not hold."""
    requirements = facts.project.requirements
    for link in facts.graph.dangling:
        derived = link.kind == "derived_from"
        known = list(requirements) if derived else [*facts.project.loops, *facts.project.subsystems]
        close = nearest(link.link.id, known)
        wanted = "no requirement" if derived else "neither a loop nor a subsystem"
        remedy = f"did you mean {close}?" if close else f"add it, or take it out of {link.kind}"
        yield Finding(
            rule=NAME,
            level=Level.ERROR,
            message=f"{link.requirement}: {link.link.id} in {link.kind} is {wanted} of this project; {remedy}",
            place=link.link.place,
            requirement=link.requirement,
        )


RULE = Rule(NAME, "Link to nothing", "error", check, __doc__)
