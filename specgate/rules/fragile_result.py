"""A result that a very small change of the model would move far.

A response turns just beside the edge of its band, or an open loop just beside the point at which a margin is counted:
the number is proved for the model as it is, and a tolerance far below any that a design has would put another one in
its place. The message names both. It is a warning where the other one would meet the limit and this one does not, or
the other way round; else a note. Put it right with a design or a limit that does not stand on the edge.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator

from flint import arb

from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.compare import compare
from specgate.compliance.readings import Reading
from specgate.compliance.wording import figure, result, subject
from specgate.response.answers import Answer
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.unit import ONE
from specgate.terms.verdicts import Level, Verdict

NAME = "fragile-result"
_MEANS = {
    Verdict.COMPLIANT.value: "which meets the limit",
    Verdict.NON_COMPLIANT.value: "which does not meet the limit",
    Verdict.OPEN.value: "which the limit does not decide",
}


def check(facts: Facts) -> Iterator[Finding]:
    """Report every criterion whose result has another candidate."""
    for name, assessment in facts.assessments.items():
        for criterion in assessment.criteria:
            fragile = criterion.reading.settled.fragile
            if fragile is not None and fragile.other is not None:
                yield _finding(name, criterion, fragile.reason, fragile.other)


def _finding(name: str, criterion: CriterionAssessment, reason: str, other: Callable[[int], arb]) -> Finding:
    candidate, unit = Answer.of_ball(other), criterion.unit or ONE
    verdict = compare(candidate, criterion.limits).verdict
    changes = verdict is not criterion.verdict
    shown = figure(Reading.once(candidate).in_unit(unit), unit, criterion.scale)
    return Finding(
        NAME,
        Level.WARNING if changes else Level.NOTE,
        f"{name}: {subject(criterion)} is {result(criterion)} and fragile: {reason}; a very small change of the model "
        f"makes it {shown}{', ' + _MEANS[verdict.value] if changes else ''}",
        criterion.criterion.place,
        requirement=name,
    )


RULE = Rule(NAME, "Fragile result", "warning where the verdict would change, else note", check, __doc__)
