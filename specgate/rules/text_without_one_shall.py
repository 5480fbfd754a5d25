"""The text of a requirement does not have exactly one `shall`.

Without one it is a statement, a wish (`should`) or a plan (`will`), and binds nobody; with several it is several
requirements, of which one may be met and another not (ISO/IEC/IEEE 29148: singular, and worded with shall). Put it
right by one sentence with one shall for each requirement. Requirements that do not apply are left out, and so are
those that come from a document, whose words are not ours.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "text-without-one-shall"

_SHALL = re.compile(r"\bshall\b", re.IGNORECASE)
_WEAK = re.compile(r"\b(should|will|must|may|is to|are to|has to|have to|needs to)\b", re.IGNORECASE)


def check(facts: Facts) -> Iterator[Finding]:
    """Report every text with no shall, and every one with more than one."""
    for requirement in facts.project.requirements.values():
        if requirement.not_applicable is not None or requirement.external is not None:
            continue
        count = len(_SHALL.findall(requirement.text))
        if count == 1:
            continue
        weak = _WEAK.search(requirement.text)
        instead = f" (it says `{weak[0]}`)" if weak is not None else ""
        what = (
            f"has {count} `shall`: make a requirement of each"
            if count
            else f"has no `shall`{instead}: say what it shall do"
        )
        place = requirement.text_place or requirement.place
        yield Finding(NAME, Level.WARNING, f"{requirement.id}: the text {what}", place, requirement=requirement.id)


RULE = Rule(NAME, "Text with no shall, or with several", "warning", check, __doc__)
