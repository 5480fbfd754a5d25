"""A claim rests on an approximation outside its range: a condition of the approximation is violated on this loop.

The requirement may still be compliant, since its verdict comes from the computed response; the claim is not shown
by its formula. Put it right by resting it on `basis: computed`, or on the approximation that the message offers.
The finding restates the standing: it is an error where `gate: hold_on` names out_of_range, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Audit, AuditedCondition
from specgate.compliance.wording import condition_words, instead_words, subject
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
                    level=facts.restating(Standing.OUT_OF_RANGE),
                    message=(
                        f"{name}: {' + '.join(audit.chain)} does not apply to {subject(criterion)}: "
                        f"{_violated(audit)}; {instead_words(criterion)}"
                    ),
                    place=audit.place,
                    requirement=name,
                    restates=True,
                )


def _violated(audit: Audit) -> str:
    broken: list[AuditedCondition] = [one for one in audit.conditions if one.found.holds is Trilean.NO]
    return "; ".join(condition_words(one) for one in broken)


RULE = Rule(NAME, "Approximation out of range", "error or warning (restates the standing)", check, __doc__)
