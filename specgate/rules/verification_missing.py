"""A requirement at the end of the trace says no method by which it is verified.

Every requirement from which nothing is derived names at least one method under `verification`, with the stage at which
it is due: analysis, test, demonstration, inspection, review of design or similarity (ECSS-E-ST-10-02C). Without one it
is judged by its criteria alone and stands in no verification plan. Requirements that do not apply, and those that wait
for others to be derived from them, are left out.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "verification-missing"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement at the end of the trace without a method of verification."""
    for requirement in facts.leaves():
        if not requirement.verification:
            message = f"{requirement.id} has no verification: say by which method, and at which stage it is due"
            yield Finding(NAME, Level.WARNING, message, requirement.place, requirement=requirement.id)


RULE = Rule(NAME, "Requirement without verification", "warning", check, __doc__)
