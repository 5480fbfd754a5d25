"""Two requirements say the very same.

Capitals, blanks and the final stop aside, their texts are equal: one of them will be changed one day and the other
not. One finding for each further one, at the later of two; the first is shown beside it. Put it right by deriving both
uses from one requirement, or by saying in each text what sets it apart. Requirements that do not apply are left out.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level

NAME = "text-duplicate"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement whose text another one before it has."""
    first: dict[str, str] = {}
    requirements = facts.project.requirements
    for name, requirement in requirements.items():
        if requirement.not_applicable is not None:
            continue
        words = " ".join(requirement.text.casefold().split()).rstrip(".")
        other = first.setdefault(words, name)
        if other != name:
            message = f"{name} says the very same as {other}: keep one of them, or say in both what sets them apart"
            there = Related(requirements[other].place, f"{other} has the same text")
            yield Finding(NAME, Level.WARNING, message, requirement.place, requirement=name, related=(there,))


RULE = Rule(NAME, "Two requirements of one text", "warning", check, __doc__)
