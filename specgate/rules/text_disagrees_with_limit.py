"""The shall-sentence names another number, or another side, than the limit of its criterion.

People sign the sentence and the gate judges the limit: they must say the same. Numbers in the text count where a
phrase gives them a side (no more than, at least, less than, within, between, not exceed, …) and where their unit is
of the kind of the limit; units are converted. A limit agrees where one of those numbers is its own, on its side.
Numbers that belong to the question itself (the band, the size of the input) are left out, and a sentence without any
number for the limit is no finding. Put it right in whichever of the two is wrong.
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import fmpq

from specgate.analysis.arguments import number
from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.budgets import same_kind
from specgate.compliance.compare import sign
from specgate.compliance.scales import Bounds, bounds, difference, on_scale
from specgate.compliance.wording import limit_words, subject
from specgate.project.parameters import Values
from specgate.project.types import Value
from specgate.response.answers import Answer
from specgate.rules.rule import Facts, Rule
from specgate.terms.expressions import literal_unit
from specgate.terms.findings import Finding, Related
from specgate.terms.places import Place
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Level
from specgate.traceability.texts import Stated, stated

NAME = "text-disagrees-with-limit"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every limit for which the text has a number, and not its own."""
    values = facts.analyses.nominal.values
    for name, assessment in facts.assessments.items():
        requirement = assessment.requirement
        numbers = [one for one in stated(requirement.text, facts.project.units) if one.side is not None]
        asked = [(value, one) for one in assessment.criteria for value in one.criterion.arguments.values()]
        numbers = [one for one in numbers if not any(_is(one, value, by, values) for value, by in asked)]
        for criterion in assessment.criteria:
            of_kind = [one for one in numbers if same_kind(one.unit, criterion.unit or ONE)]
            if of_kind and criterion.criterion.limit.truth is None and criterion.unit is not None:
                place = requirement.text_place or requirement.place
                yield from _compared(name, place, criterion, of_kind, values)


def _compared(
    name: str, place: Place, criterion: CriterionAssessment, numbers: list[Stated], values: Values
) -> Iterator[Finding]:
    limit, unit = criterion.criterion.limit, criterion.unit or ONE
    wanted = bounds(limit, unit, values, criterion.span)
    if limit.kind == "within":
        distance = on_scale(limit.values[0], unit, values, criterion.span)
        wanted = Bounds(None, distance)
    missing = [
        end
        for end, side in ((wanted.least, "lower"), (wanted.most, "upper"))
        if end is not None and not any(one.side in (side, "both") and _equal(one, end, unit) for one in numbers)
    ]
    if missing:
        said = " and ".join(dict.fromkeys(one.words for one in numbers))
        message = (
            f"{name}: the text says {said}, and the limit of {subject(criterion)} is {limit_words(limit)}: "
            "make them say the same"
        )
        there = Related(limit.place, "the limit")
        yield Finding(NAME, Level.ERROR, message, place, requirement=name, related=(there,))


def _equal(one: Stated, end: Answer, unit: Unit) -> bool:
    """Whether a number of the text is a bound, both in `unit`."""
    number = one.number if unit.kind == "decibel" else one.number * one.unit.si_factor / unit.si_factor
    return sign(difference(end, Answer.of_exact(number)), fmpq(0)) == 0


def _is(one: Stated, value: Value, criterion: CriterionAssessment, values: Values) -> bool:
    """Whether a number of the text is an argument of the question, such as its band."""
    if one.unit.kind == "decibel" or not same_kind(literal_unit(value.expression) or ONE, one.unit):
        return False
    return number(value, values, criterion.span) / one.unit.si_factor == one.number


RULE = Rule(NAME, "Text and limit that do not agree", "error", check, __doc__)
