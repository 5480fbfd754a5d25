"""The limits given to the shares of a budget together go beyond the limit that is shared, or their results do.

The shares are combined as the budget says: added, by root-sum-square, as the greatest or smallest, or multiplied. An
error where the limits, even if each is kept, allow more than the whole; and where what was found for the shares is
more than the whole although the requirement has a criterion of its own that is met. A warning where only the reserve
that is to be kept back is given away. Put it right by tightening a share, or the design behind it.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Assessment, BudgetAssessment
from specgate.compliance.budgeting import used_words
from specgate.compliance.budgets import Sum
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level, Trilean, Verdict

NAME = "budget-overdrawn"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every budget whose shares may, or do, use more than there is."""
    for name, assessment in facts.assessments.items():
        budget = assessment.budget
        if budget is None:
            continue
        if budget.allotted is Trilean.NO:
            message = f"{name}: the limits of its shares together allow {used_words(budget, given=True)}"
            yield _finding(name, Level.ERROR, f"{message}{_most(budget.given)}", budget)
        elif budget.with_reserve is Trilean.NO and budget.budget.reserve is not None:
            message = f"{name}: the limits of its shares together allow {used_words(budget, given=True)}"
            back = budget.budget.reserve.as_written
            yield _finding(name, Level.WARNING, f"{message} with {back} held back{_most(budget.given)}", budget)
        if budget.result is Trilean.NO and assessment.verdict is not Verdict.NON_COMPLIANT and _own(assessment):
            message = f"{name} is met by itself, and what its shares use together is {used_words(budget)}"
            yield _finding(name, Level.ERROR, f"{message}{_most(budget.used)}", budget)


def _own(assessment: Assessment) -> bool:
    return bool(assessment.criteria) or assessment.requirement.decided_by != "criteria"


def _most(whole: Sum | None) -> str:
    """Name the share that is the greatest part."""
    parts = {} if whole is None else {name: float(part.enclose(64).mid()) for name, part in whole.parts.items()}
    if len(parts) < 2:
        return ""
    name = max(parts, key=parts.__getitem__)
    return f"; the greatest part is that of {name}, {100 * parts[name]:.3g} %"


def _finding(name: str, level: Level, message: str, budget: BudgetAssessment) -> Finding:
    shares = tuple(Related(share.place, f"the share of {share.id}") for share in budget.budget.shares)
    return Finding(NAME, level, message, budget.budget.place, requirement=name, related=shares)


RULE = Rule(NAME, "Budget that does not add up", "error; warning where only the reserve is used", check, __doc__)
