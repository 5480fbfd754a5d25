"""A record is there and its results cannot be compared with a limit.

The rule of decision is guarded and the record does not state its expanded uncertainty, or it has results and the
requirement has no limit. The method that it belongs to is open. The finding restates that: an error where
`gate: hold_on` names open, else a warning. Put it right as the message says.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "evidence-undecided"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every record on this revision that decides nothing."""
    for name, assessment in facts.assessments.items():
        for one in assessment.records:
            if one.verdict is Verdict.OPEN and not one.stale:
                level = facts.restating(Verdict.OPEN, assessment)
                message = f"{name}: {one.evidence.id} decides nothing: {one.reason}"
                yield Finding(NAME, level, message, one.evidence.place, requirement=name, restates=True)


RULE = Rule(NAME, "Record that decides nothing", "error or warning (restates the verdict)", check, __doc__)
