"""The text of a requirement has a word in it that nobody can verify.

Subjective and ambiguous words, superlatives, loopholes and open ends are those that ISO/IEC/IEEE 29148 names:
adequate, sufficient, easy, fast, robust, significant, minimal, best, if possible, as appropriate, but not limited to,
and/or and their like. A project adds its own under `wording: {unverifiable: […]}` and lets a listed one pass with
`allowed: […]`. Put it right by the number, the condition or the list that is meant. Requirements that do not apply,
and those that come from a document, are left out.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "text-unverifiable"

LISTED = (
    *("adequate", "adequately", "sufficient", "sufficiently", "appropriate", "appropriately", "suitable", "suitably"),
    *(
        "reasonable",
        "reasonably",
        "acceptable",
        "satisfactory",
        "proper",
        "properly",
        "good",
        "nice",
        "optimal",
        "best",
    ),
    *("easy", "easily", "simple", "user-friendly", "user friendly", "cost-effective", "cost effective", "convenient"),
    *("fast", "quick", "quickly", "rapid", "rapidly", "timely", "slow", "slowly", "soon", "immediately", "promptly"),
    *(
        "robust",
        "flexible",
        "reliable",
        "stable enough",
        "smooth",
        "smoothly",
        "efficient",
        "efficiently",
        "state of the art",
    ),
    *(
        "significant",
        "significantly",
        "considerable",
        "substantial",
        "minimal",
        "negligible",
        "large enough",
        "small enough",
    ),
    *(
        "maximise",
        "maximize",
        "minimise",
        "minimize",
        "optimise",
        "optimize",
        "improve",
        "enhance",
        "as much as possible",
    ),
    *(
        "approximately",
        "roughly",
        "nearly",
        "almost",
        "about right",
        "normally",
        "usually",
        "generally",
        "often",
        "typically",
    ),
    *(
        "if possible",
        "where possible",
        "as far as possible",
        "if practical",
        "as practical",
        "as appropriate",
        "as applicable",
    ),
    *(
        "as required",
        "as necessary",
        "if necessary",
        "when necessary",
        "to the extent",
        "but not limited to",
        "etc",
        "and so on",
    ),
    *(
        "and/or",
        "better than before",
        "as a minimum",
        "provide support",
        "support for",
        "not limited to",
        "capable of being",
    ),
)
"""Words and phrases, in small letters."""


def check(facts: Facts) -> Iterator[Finding]:
    """Report the unverifiable words of every text, once for each requirement."""
    own = facts.project.wording
    allowed = {word.casefold() for word in own.allowed}
    words = [word for word in dict.fromkeys((*LISTED, *map(str.casefold, own.unverifiable))) if word not in allowed]
    pattern = re.compile(rf"(?<![\w-])(?:{'|'.join(map(re.escape, sorted(words, key=len, reverse=True)))})(?![\w-])")
    for requirement in facts.project.requirements.values():
        if requirement.not_applicable is not None or requirement.external is not None:
            continue
        found = dict.fromkeys(pattern.findall(" ".join(requirement.text.casefold().split())))
        if found:
            named = ", ".join(f"`{word}`" for word in found)
            message = f"{requirement.id}: nobody can verify {named} in the text: say the number or the condition"
            place = requirement.text_place or requirement.place
            yield Finding(NAME, Level.WARNING, message, place, requirement=requirement.id)


RULE = Rule(NAME, "Word that cannot be verified", "warning", check, __doc__)
