"""A criterion limits a measure that is proved to have no value: the settling time of what does not settle.

A limit on a value that does not exist is not met. The message gives the reason. Put it right by changing the
design, or by limiting a measure that this response has. The finding explains a verdict of non_compliant: it is an
error where `gate: hold_on` names that, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.wording import subject
from specgate.measures.table import MEASURES
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Verdict

NAME = "measure-does-not-exist"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every criterion whose measure is proved to have no value."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            absent = criterion.reading.settled.absent
            if absent is not None and absent.proved and not absent.infinite:
                yield Finding(
                    rule=NAME,
                    level=facts.restating(Verdict.NON_COMPLIANT, assessment),
                    message=(
                        f"{name}: {subject(criterion)} does not exist: {absent.reason}; change the design, or limit a "
                        f"measure that exists here{_reference(facts, criterion)}"
                    ),
                    place=criterion.criterion.place,
                    requirement=name,
                    restates=True,
                )


def _reference(facts: Facts, criterion: CriterionAssessment) -> str:
    """Offer another reference where an error is measured from the input only because none is named."""
    about = criterion.criterion.subject
    if not MEASURES[criterion.criterion.measure].of_error or about.kind != "response":
        return ""
    response = facts.analyses.loops[about.loop].responses[str(about.name)].response
    if response.reference is not None or len(response.excitations) != 1:
        return ""
    source = response.excitations[0].source
    return f". The error is measured from {source}: if that is a disturbance, give the response `reference: 0`"


RULE = Rule(NAME, "Measure does not exist", "error, warning or note (explains the verdict)", check, __doc__)
