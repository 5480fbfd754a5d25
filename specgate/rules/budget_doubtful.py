"""A budget at a level of confidence rests on few shares, or on one that outweighs the others.

Deviations that are added by root-sum-square are at two or three sigma of the whole only as far as their sum is
normal. That is the limit of many independent shares of like size. With fewer than four, or with one that makes more
than half of the variance, the share of cases beyond the limit is that of those few distributions, which nobody has
stated. Put it right by adding the great share linearly (`as: mean`), or by stating its distribution. No finding where
the budget names no level.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "budget-doubtful"

_FEW = 4
_HALF = 0.5


def check(facts: Facts) -> Iterator[Finding]:
    """Report every root-sum-square at a level whose parts are few, or one of which is most of it."""
    for name, assessment in facts.assessments.items():
        budget = assessment.budget
        if budget is None or budget.given is None or budget.budget.level is None:
            continue
        if budget.budget.combine != "root_sum_square":
            continue
        parts = {share: float(part.enclose(64).mid()) for share, part in budget.given.parts.items()}
        greatest = max(parts, key=parts.__getitem__, default="")
        if parts and parts[greatest] > _HALF:
            why = f"{greatest} makes {100 * parts[greatest]:.3g} % of the variance"
        elif 0 < len(parts) < _FEW:
            why = f"it has {len(parts)} independent shares"
        else:
            continue
        message = f"{name}: that its sum is normal is doubtful: {why}; add that linearly, or state its distribution"
        yield Finding(NAME, Level.WARNING, message, budget.budget.place, requirement=name)


RULE = Rule(NAME, "Root-sum-square of few or unequal shares", "warning", check, __doc__)
