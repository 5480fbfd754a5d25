"""The text of a requirement has something in it that is still to be determined, resolved or confirmed.

TBD, TBR, TBC and TBS, or the words written out, stand for a decision that somebody owes. A requirement with one is
not complete (ISO/IEC/IEEE 29148, characteristics of individual requirements). Put it right by deciding it, or by a
requirement without it and one for the rest. Requirements that do not apply are left out.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "text-to-be-determined"

_OPEN = re.compile(
    r"\b(?:TB[DRCSN]|to be (?:determined|defined|decided|resolved|reviewed|confirmed|specified|supplied))\b|\?\?+",
    re.IGNORECASE,
)


def check(facts: Facts) -> Iterator[Finding]:
    """Report every text with an open decision in it."""
    for requirement in facts.project.requirements.values():
        found = _OPEN.search(requirement.text)
        if found is not None and requirement.not_applicable is None:
            message = f"{requirement.id}: `{found[0]}` in the text is a decision that is still owed: make it"
            place = requirement.text_place or requirement.place
            yield Finding(NAME, Level.WARNING, message, place, requirement=requirement.id)


RULE = Rule(NAME, "Text that is not finished", "warning", check, __doc__)
