"""A claim rests on an approximation that applies and does not decide: the limit lies inside what it leaves open.

An approximation with a stated error of e1 to e2 leaves the truth anywhere from claim/(1+e2) to claim/(1+e1). Where
the limit lies inside that interval the claim neither shows nor refutes compliance. The same is said where a
condition cannot be decided, where no accuracy is stated for the arguments of the criterion, and where this version
does not audit the basis. Put it right by resting the claim on `basis: computed`. The finding restates the standing:
it is an error where `gate: hold_on` names inconclusive, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.wording import basis_words, instead_words, promise_words, subject
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Standing

NAME = "approximation-inconclusive"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every basis that is inconclusive."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            audit = criterion.audit
            if audit.kind == "approximation" and audit.standing is Standing.INCONCLUSIVE:
                yield Finding(
                    rule=NAME,
                    level=facts.restating(Standing.INCONCLUSIVE, assessment),
                    message=(
                        f"{name}: {basis_words(audit)} does not decide {subject(criterion)}: "
                        f"{'; '.join(filter(None, (audit.reason, promise_words(criterion), instead_words(criterion))))}"
                    ),
                    place=audit.place,
                    requirement=name,
                    restates=True,
                )


RULE = Rule(NAME, "Approximation inconclusive", "error, warning or note (restates the standing)", check, __doc__)
