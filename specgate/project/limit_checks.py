"""Checks of the limit of a criterion, and of a claim: in a unit of the measure, in order, and not met by anything."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from functools import partial

from flint import fmpq

from specgate.measures.measure import Measure, UnitRule
from specgate.project import faults
from specgate.project.about import About
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault
from specgate.project.parameters import SIGNAL_WORDS, Values, evaluate, infer, written_numbers
from specgate.project.percent import refuse_ambiguous, relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.types import Limit, Value
from specgate.terms.dimensions import DIMENSIONLESS, RATE, TIME, Dimension
from specgate.terms.expressions import PercentOf, as_dimension, is_read, literal_unit

_DIMENSIONS: Mapping[UnitRule, Callable[[Dimension], Dimension]] = {
    UnitRule.SECOND: lambda _: TIME,
    UnitRule.SIGNAL: lambda signal: signal,
    UnitRule.CHANGE: lambda signal: signal,
    UnitRule.SIGNAL_RATE: lambda signal: signal / TIME,
    UnitRule.SIGNAL_SECOND: lambda signal: signal * TIME,
    UnitRule.SIGNAL_SQUARED_SECOND: lambda signal: signal**2 * TIME,
    UnitRule.COUNT: lambda _: DIMENSIONLESS,
    UnitRule.RATIO: lambda _: DIMENSIONLESS,
    UnitRule.DECIBEL: lambda _: DIMENSIONLESS,
    UnitRule.DEGREE: lambda _: DIMENSIONLESS,
    UnitRule.RADIAN_PER_SECOND: lambda _: RATE,
    UnitRule.PER_SECOND: lambda _: RATE,
    UnitRule.PER_SECOND_SQUARED: lambda _: TIME**-2,
}
"""Dimension of a limit by the rule of its measure, from the dimension of the signal."""

_OF_SIGNAL = frozenset(
    {
        UnitRule.SIGNAL,
        UnitRule.CHANGE,
        UnitRule.SIGNAL_RATE,
        UnitRule.SIGNAL_SECOND,
        UnitRule.SIGNAL_SQUARED_SECOND,
    }
)
_RATIOS = frozenset({UnitRule.RATIO, UnitRule.DECIBEL})

_ONE_SIDED = {("maximum_value", "at_most"), ("minimum_value", "at_least")}
"""Where a value on the other side of zero is no mistake: a greatest value not to exceed, a least one to stay above."""


class LimitCheck:
    """The checks of what a measure of a subject is compared with."""

    def __init__(self, about: About, measure: Measure, values: Values) -> None:
        self.about, self.measure, self.values = about, measure, values

    def checks(self, limit: Limit) -> Iterator[Callable[[], None]]:
        """Give the checks of a limit that do not depend on one another; each raises Fault."""
        if not all(is_read(value.expression) for value in limit.values):
            return
        if (limit.truth is not None) != (self.measure.unit is UnitRule.YES_NO):
            yield partial(self._truth, limit)
        elif limit.truth is None:
            for value in limit.values:
                yield partial(self.counted, value)
            yield partial(self._placed, limit)

    def _truth(self, limit: Limit) -> None:
        if limit.truth is not None:
            message = f"`{self.measure.name}` is a number: yes or no is no limit for it"
        else:
            message = f"`{self.measure.name}` is yes or no: limit it by `equals: true` or `equals: false`"
        raise Fault(faults.DIMENSION, message, limit.place)

    def _placed(self, limit: Limit) -> None:
        """See that a limit in the right unit is one that something may keep and something break. Raises Fault."""
        try:
            for value in limit.values:
                self.counted(value)
        except Fault:
            return  # said of the value
        self._order(limit)
        self._sign(limit)

    def counted(self, value: Value) -> None:
        """Check that a limit or a claim is in a unit of the measure. Raises Fault."""
        rule = self.measure.unit
        if rule is UnitRule.YES_NO:
            message = f"`{value.as_written}`: {self.measure.name} is yes or no, which no value can stand for"
            raise Fault(faults.DIMENSION, message, value.place)
        self._decibel(value)
        if rule in _OF_SIGNAL:
            refuse_ambiguous(value, self.about.unit)
        if rule is UnitRule.CHANGE and relative_to_change(value) is not None:
            return
        if rule is UnitRule.RADIAN_PER_SECOND:
            refuse_written_rate(value, self.values)
        if rule is UnitRule.PER_SECOND:
            self._no_cycles(value)
        if rule is UnitRule.DEGREE:
            self._angle(value)
        self._of_span(value)
        self._dimension(value, _DIMENSIONS[rule](self._signal(value)))

    def _dimension(self, value: Value, wanted: Dimension) -> None:
        inferred = infer(value, self.values, None, self._signal(value))
        plain_zero = (
            as_dimension(inferred) == DIMENSIONLESS and evaluate(value, self.values, None, self._span(value)) == 0
        )
        if as_dimension(inferred) != wanted and not plain_zero:
            offered = " or % of the change" if self.measure.unit is UnitRule.CHANGE else ""
            percent = relative_to_change(value) is not None
            found = "per cent of nothing in particular (`% of span`, `% of` a parameter?)" if percent else ""
            raise Fault(
                faults.DIMENSION,
                f"`{value.as_written}`: {self.measure.name} is in {self._shown(wanted)}{offered}, "
                f"this is {found or shown(value, inferred)}",
                value.place,
            )
        if self.measure.unit in (UnitRule.SIGNAL, UnitRule.CHANGE) and not plain_zero:
            refuse_unsaid(value, self.about.unit, self.values)

    def _signal(self, value: Value) -> Dimension:
        """Return the dimension of the signal, where it matters: a time is a time on a signal that is not known too."""
        needed = self.measure.unit in _OF_SIGNAL or not _named(value).isdisjoint(SIGNAL_WORDS)
        return self.about.unit.dimension if needed else DIMENSIONLESS

    def _span(self, value: Value) -> fmpq | None:
        return self.about.span if "span" in _named(value) else None

    def _shown(self, wanted: Dimension) -> str:
        rule = self.measure.unit
        if rule in (UnitRule.RADIAN_PER_SECOND, UnitRule.DECIBEL, UnitRule.DEGREE):
            return str(rule.value)
        return self.about.unit.symbol if rule in _OF_SIGNAL and wanted == self.about.unit.dimension else str(wanted)

    def _of_span(self, value: Value) -> None:
        names = _named(value)
        if "span" in names and self.about.span is None:
            message = f"`{value.as_written}`: the signal has no `span: [low, high]` to take a part of"
            raise Fault(faults.DIMENSION, message, value.place)
        if "change" in names and self.measure.unit is not UnitRule.CHANGE:
            message = f"`{value.as_written}`: {self.measure.name} is not measured in parts of the change"
            raise Fault(faults.DIMENSION, message, value.place)

    def _decibel(self, value: Value) -> None:
        unit = literal_unit(value.expression)
        if unit is not None and unit.kind == "decibel" and self.measure.unit not in _RATIOS:
            message = f"`{value.as_written}`: {self.measure.name} is no ratio that could be in dB"
            raise Fault(faults.DIMENSION, message, value.place)
        if unit is not None and unit.angle and self.measure.unit in _RATIOS:
            message = f"`{value.as_written}`: {self.measure.name} is a ratio, not an angle: give it plain or in dB"
            raise Fault(faults.DIMENSION, message, value.place)

    def _no_cycles(self, value: Value) -> None:
        for node in written_numbers(value.expression, self.values):
            if node.unit is not None and node.unit.frequency and node.unit.pi_power:
                message = f"`{value.as_written}`: {self.measure.name} is in 1/s, not in {node.unit.symbol}"
                raise Fault(faults.DIMENSION, message, value.place)

    def _angle(self, value: Value) -> None:
        written = [node.unit for node in written_numbers(value.expression, self.values)]
        if not any(unit is not None and unit.angle == 1 for unit in written):
            message = f"`{value.as_written}`: {self.measure.name} is an angle: give it in deg or rad"
            raise Fault(faults.DIMENSION, message, value.place)

    def _order(self, limit: Limit) -> None:
        numbers = [self._number(value) for value in limit.values]
        written = ", ".join(value.as_written for value in limit.values)
        if limit.kind == "between" and numbers[0] > numbers[1]:
            raise Fault(faults.VALUE, f"nothing lies between: [{written}]; the lower limit comes first", limit.place)
        if limit.kind == "within" and numbers[0] < 0:
            raise Fault(faults.VALUE, f"`{limit.values[0].as_written}`: a distance is not negative", limit.place)
        if limit.kind == "equals" and (numbers[0].q != 1 or self.measure.unit is not UnitRule.COUNT):
            raise Fault(faults.VALUE, f"`equals: {written}` is for whole numbers that are counted", limit.place)

    def _sign(self, limit: Limit) -> None:
        """Refuse a limit that a value of the wrong sign would meet. Raises Fault."""
        kind = limit.kind
        if not self.measure.sided or kind not in ("at_most", "at_least"):
            return
        number, written = self._number(limit.values[0]), limit.values[0].as_written
        wrong = number > 0 if kind == "at_most" else number < 0
        if wrong and (self.measure.name, kind) not in _ONE_SIDED:
            side = "far below zero" if kind == "at_most" else "far above zero"
            deviation = ", or measure `peak_deviation`" if self.measure.unit is UnitRule.SIGNAL else ""
            raise Fault(
                faults.SIGN,
                f"`{kind}: {written}` is met by a {self.measure.name} {side} as well: write `within: …, of: …` or "
                f"`between: […, …]`{deviation}",
                limit.place,
            )

    def _number(self, value: Value) -> fmpq:
        relative = relative_to_change(value) if self.measure.unit is UnitRule.CHANGE else None
        return evaluate(value, self.values, None, self._span(value)) if relative is None else relative


def _named(value: Value) -> set[str]:
    """Return what a value is per cent of."""
    return {node.name for node in value.expression.walk() if isinstance(node, PercentOf)}
