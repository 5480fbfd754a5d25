"""What is left to a limit: the distance, positive inside, in the unit of the result."""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.figures import combined, quotient, smallest
from specgate.compliance.assessment import CriterionAssessment
from specgate.compliance.readings import Reading
from specgate.response.answers import Answer
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit


@record
class Reserve:
    """value: None where it is without limit. relative: to the limit, to half the width for two-sided limits.

    scale, relative_scale: what value and relative are small against. All in the unit of the result.
    """

    value: Answer | None
    relative: Answer | None = None
    scale: fmpq | None = None
    relative_scale: fmpq | None = None


def reserve(assessed: CriterionAssessment) -> Reserve | None:
    """Return the reserve of a criterion; None where there is no number or nothing to be distant from."""
    answer, limits = assessed.reading.settled, assessed.limits
    if answer.absent is not None and answer.absent.infinite and limits.least is not None and limits.most is None:
        return Reserve(None)
    if answer.absent is not None or answer.truth is not None or assessed.criterion.limit.kind == "equals":
        return None
    unit = assessed.unit or ONE
    value = assessed.reading.in_unit(unit)
    least, most = assessed.least, assessed.most
    left = [_difference(value, least.in_unit(unit))] if least is not None else []
    left += [_difference(most.in_unit(unit), value)] if most is not None else []
    distance = smallest(left)
    yardstick = None if unit.kind == "decibel" else _yardstick(least, most, unit)
    if yardstick is None:
        return Reserve(distance, None, assessed.scale)
    relative = quotient(distance, Answer.of_exact(yardstick))
    return Reserve(distance, relative, yardstick if assessed.scale is None else assessed.scale, fmpq(1))


def _yardstick(least: Reading | None, most: Reading | None, unit: Unit) -> fmpq | None:
    """Return what a distance is relative to: the limit, or half the width between two; None for zero."""
    if least is not None and most is not None:
        only: Reading | None = Reading(_half(most.answer, least.answer), _half(most.again, least.again))
    else:
        only = least or most
    size = None if only is None else only.in_unit(unit).exact
    return None if size is None or size == 0 else abs(size)


def _half(high: Answer, low: Answer) -> Answer:
    assert high.exact is not None
    assert low.exact is not None
    return Answer.of_exact((high.exact - low.exact) / 2)


def _difference(larger: Answer, smaller: Answer) -> Answer:
    if larger.exact is not None and smaller.exact is not None:
        return Answer.of_exact(larger.exact - smaller.exact)
    return combined(lambda x, y: x - y, larger, smaller)
