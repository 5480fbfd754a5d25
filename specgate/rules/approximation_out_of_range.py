"""A claim rests on an approximation outside its range: a condition of the approximation is violated on this loop.

The requirement may still be compliant, since its verdict comes from the computed response; the claim is not shown
by its formula. Put it right by resting it on `basis: computed`, or on the approximation that the message offers.
The finding restates the standing: it is an error where `gate: hold_on` names out_of_range, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Audit
from specgate.compliance.wording import basis_words, condition_words, instead_words, promise_words, subject
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Standing, Trilean

NAME = "approximation-out-of-range"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every basis that is out of range."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            audit = criterion.audit
            if audit.standing is Standing.OUT_OF_RANGE:
                yield Finding(
                    rule=NAME,
                    level=facts.restating(Standing.OUT_OF_RANGE, assessment),
                    message=(
                        f"{name}: {basis_words(audit)} is out of its range for {subject(criterion)}: "
                        f"{_violated(audit)}; {promise_words(criterion)}; {instead_words(criterion)}"
                    ),
                    place=audit.place,
                    requirement=name,
                    restates=True,
                )


def _violated(audit: Audit) -> str:
    """Say the first condition that does not hold, and how many more there are; the review lists all of them."""
    broken = [one for one in audit.conditions if one.found.holds is Trilean.NO]
    if not broken:
        return audit.reason or "it has no value here"
    if len(broken) == 1:
        return condition_words(broken[0])
    more = "1 more condition" if len(broken) == 2 else f"{len(broken) - 1} more conditions"
    return f"{condition_words(broken[0])}, and {more} do{'es' if len(broken) == 2 else ''} not hold"


RULE = Rule(NAME, "Approximation out of range", "error, warning or note (restates the standing)", check, __doc__)
