"""A waiver is in force, and what it accepts is not enough.

The computed value or a record lies outside the limit that it accepts, or a basis is out of range where inconclusive
is accepted. It excuses nothing then: the gate holds. Put it right by a new decision of those who approved it, or by
changing the design.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "waiver-insufficient"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every waiver in force that does not cover what it is about."""
    for name, assessment in facts.assessments.items():
        for one in assessment.waivers:
            if one.needed and one.lapsed is None and not one.covers:
                message = f"{name}: the {one.waiver.kind} {one.waiver.id} does not accept enough: {one.reason}"
                yield Finding(NAME, Level.ERROR, message, one.waiver.place, requirement=name)


RULE = Rule(NAME, "Waiver that does not accept enough", "error", check, __doc__)
