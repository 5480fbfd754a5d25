"""A waiver is about something that complies.

The requirement is met, or its basis is sound, without it. A waiver that stays behind would excuse the next failure in
silence. Put it right by closing it. It is left alone while the requirement is open.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level, Verdict

NAME = "waiver-unneeded"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every waiver that nothing needs."""
    for name, assessment in facts.assessments.items():
        for one in assessment.waivers:
            if not one.needed and assessment.verdict is not Verdict.OPEN:
                message = f"{name} does not need the {one.waiver.kind} {one.waiver.id}: close it"
                yield Finding(NAME, Level.NOTE, message, one.waiver.place, requirement=name)


RULE = Rule(NAME, "Waiver that nothing needs", "note", check, __doc__)
