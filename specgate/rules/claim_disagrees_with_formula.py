"""A claimed value is not what its own formula gives on this loop.

A claim may differ from the formula by half a unit of its last printed digit (0.71 s: by 5 ms). More is a slip of
arithmetic, or a formula evaluated on another loop. A slip that promises more than the formula is an error and holds
the gate; a claim that is on the safe side of its formula (rounded up for an upper limit, say) is a note. Put it
right by claiming the value that the message gives.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.wording import claim_words, formula_words, subject
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "claim-disagrees-with-formula"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every claim that is further from its formula than its last digit allows."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            if criterion.audit.slip is not None:
                yield _finding(name, criterion, safe=criterion.audit.slip.side == "safe")


def _finding(name: str, criterion: CriterionAssessment, *, safe: bool) -> Finding:
    side = "on the safe side of" if safe else "not what is given by"
    return Finding(
        rule=NAME,
        level=Level.NOTE if safe else Level.ERROR,
        message=(
            f"{name}: the claim of {claim_words(criterion)} for {subject(criterion)} is {side} its formula, which "
            f"gives {formula_words(criterion)} on this loop" + ("" if safe else ": claim that, or correct the model")
        ),
        place=criterion.audit.place,
        requirement=name,
    )


RULE = Rule(NAME, "Claim disagrees with its formula", "error; note on the safe side", check, __doc__)
