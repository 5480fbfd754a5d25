"""Values on the scale on which a result is printed: in its unit, in decibels as decibels.

A limit of 6 dB and a result of 6 dB are equal on this scale; as ratios they are two rounded decimals.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.analysis.arguments import number
from specgate.approximations.figures import combined
from specgate.compliance.readings import Reading
from specgate.project.parameters import Values
from specgate.project.types import Limit, Value
from specgate.response.answers import Answer
from specgate.terms.expressions import Number, literal_unit
from specgate.terms.records import record
from specgate.terms.unit import Unit


@record
class Bounds:
    """Lower and upper limit on a scale; None where there is none."""

    least: Answer | None = None
    most: Answer | None = None

    def beside(self, others: Bounds) -> Bounds:
        """Return these bounds, and the other ones on a side where these have none."""
        return Bounds(self.least or others.least, self.most or others.most)


def on_scale(value: Value, unit: Unit, values: Values, span: fmpq | None = None) -> Answer:
    """Return a value in `unit`. Raises Fault."""
    written = literal_unit(value.expression)
    if unit.kind == "decibel" and written is not None and written.kind == "decibel":
        assert isinstance(value.expression, Number)
        return Answer.of_exact(value.expression.value)
    if unit.kind == "decibel":
        return Reading.once(Answer.of_exact(number(value, values, span))).in_unit(unit)
    return Answer.of_exact(number(value, values, span) / unit.factor_with(values.pi))


def bounds(limit: Limit, unit: Unit, values: Values, span: fmpq | None = None) -> Bounds:
    """Return the bounds of a limit in numbers. Raises Fault."""
    ends = [on_scale(value, unit, values, span) for value in limit.values]
    if not ends:
        return Bounds()
    if limit.kind == "at_most":
        return Bounds(most=ends[0])
    if limit.kind == "at_least":
        return Bounds(least=ends[0])
    if limit.kind == "equals":
        return Bounds(ends[0], ends[0])
    if limit.kind == "within":
        return Bounds(difference(ends[1], ends[0]), difference(ends[1], ends[0], -1))
    return Bounds(ends[0], ends[1])


def difference(larger: Answer, smaller: Answer, sign: int = 1) -> Answer:
    """Return larger - sign * smaller, exact where both are."""
    if larger.exact is not None and smaller.exact is not None:
        return Answer.of_exact(larger.exact - sign * smaller.exact)
    return combined(lambda x, y: x - sign * y, larger, smaller)


def times(factor: fmpq, value: Answer) -> Answer:
    """Return a multiple of a value, exact where that is."""
    if value.exact is not None:
        return Answer.of_exact(factor * value.exact)
    return combined(lambda ball: arb(factor) * ball, value)


def distance(one: Answer, other: Answer) -> Answer:
    """Return how far two values are from each other, exact where both are."""
    if one.exact is not None and other.exact is not None:
        return Answer.of_exact(abs(one.exact - other.exact))
    return combined(lambda x, y: abs(x - y), one, other)
