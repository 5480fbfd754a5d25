"""A waiver that is needed is not in force.

It has expired, by its date or with the revision that it names, or it is approved on a day that is still to come. What
it was to accept is not accepted any more: the gate holds. A waiver still holds on the day on which it expires. Today
is the date of the title block, or what `--date` says; the clock is never asked, so that the same files give the same
result. A waiver with an expiry date in a project without a date is not in force. Put it right by a new decision of
those who approved it, or by meeting the requirement.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "waiver-not-in-force"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every waiver that is needed and not in force."""
    for name, assessment in facts.assessments.items():
        for one in assessment.waivers:
            if one.needed and one.lapsed is not None:
                message = f"{name}: the {one.waiver.kind} {one.waiver.id} is not in force: {one.lapsed}"
                yield Finding(NAME, Level.ERROR, message, one.waiver.place, requirement=name)


RULE = Rule(NAME, "Waiver that is expired or not yet approved", "error", check, __doc__)
