"""A requirement stands outside the trace: nobody says what need it serves.

In a project that uses `derived_from` at all, a requirement is an orphan if it is derived from nothing and is no
root. A root is a need from which others are derived, one that is `decided_by: derived`, or one that comes from a
document (`external`). A requirement that does not apply is left out, and so is one whose links all dangle: those
are reported by dangling-link. Put it right by naming the parent in `derived_from`, by `external` where the need
lies outside the project, or by deleting the requirement.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.project.types import Requirement
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "requirement-orphan"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every orphan."""
    requirements = facts.project.requirements
    if not any(requirement.derived_from for requirement in requirements.values()):
        return
    for name, requirement in requirements.items():
        if not requirement.derived_from and not _is_root(requirement, facts):
            yield Finding(
                rule=NAME,
                level=Level.ERROR,
                message=f"{name} is derived from nothing: name the need that it serves in derived_from, or delete it",
                place=requirement.place,
                requirement=name,
            )


def _is_root(requirement: Requirement, facts: Facts) -> bool:
    return (
        requirement.decided_by == "derived"
        or requirement.external is not None
        or requirement.not_applicable is not None
        or bool(facts.graph.children[requirement.id])
    )


RULE = Rule(NAME, "Requirement without a parent", "error", check, __doc__)
