"""A result is further from the computed value than its uncertainty and the stated agreement let it be.

`model_agreement` says how far a result may be from the model, beyond its own expanded uncertainty; in per cent that
is of the computed value, for values in decibels a factor (10 % are 20 log10(1.1) = 0.83 dB). Beyond that the model or
the test is wrong, whichever of them meets the limit, and neither shows anything until it is known which. Put it right
by finding out, not by a wider agreement.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import Disagreement, RecordAssessment
from specgate.compliance.wording import apart, subject
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.unit import ONE
from specgate.terms.verdicts import Level

NAME = "test-disagrees-with-model"


def check(facts: Facts) -> Iterator[Finding]:
    """Report the result of each record that is furthest from the model, where that is too far."""
    for name, assessment in facts.assessments.items():
        for one in assessment.records:
            if one.disagreement is not None and not one.stale:
                yield _finding(name, one, one.disagreement)


def _finding(name: str, one: RecordAssessment, found: Disagreement) -> Finding:
    assert one.criterion is not None
    unit = one.unit or ONE
    result, model = apart([found.result, found.model], unit)
    (allowed,) = apart([found.allowed], unit)
    message = (
        f"{name}: {subject(one.criterion)} is {model} by the model and {result} by {one.evidence.id}: they may be "
        f"{allowed} apart; find out which of them is wrong"
    )
    there = Related(one.criterion.criterion.place, "what was computed")
    return Finding(NAME, Level.ERROR, message, one.evidence.place, requirement=name, related=(there,))


RULE = Rule(NAME, "Result far from the computed value", "error", check, __doc__)
