"""A budget cannot be added up.

A share is no requirement of the project, has no limit in the unit of what is shared, has no limit on the side that
counts, or several; or the budget has no limit of its own. The message says which. The finding restates that the
requirement is open: an error where `gate: hold_on` names open, else a warning; a warning too where the requirement is
decided without it.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level, Verdict

NAME = "budget-undecided"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every budget of which something is unknown."""
    for name, assessment in facts.assessments.items():
        budget = assessment.budget
        if budget is not None and budget.reason is not None:
            level = facts.restating(Verdict.OPEN, assessment) if assessment.verdict is Verdict.OPEN else Level.WARNING
            message = f"{name}: its budget cannot be added up: {budget.reason}"
            yield Finding(NAME, level, message, budget.budget.place, requirement=name, restates=True)


RULE = Rule(NAME, "Budget that cannot be added up", "error or warning (restates the verdict)", check, __doc__)
