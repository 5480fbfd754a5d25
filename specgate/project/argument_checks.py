"""Checks of what a criterion gives beside its limit: arguments, a range of frequencies, a mask."""

from __future__ import annotations

from flint import fmpq

from specgate.measures.measure import Measure
from specgate.project import faults
from specgate.project.about import About
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate, infer
from specgate.project.percent import refuse_ambiguous, relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.subsystem_checks import wants
from specgate.project.types import Value
from specgate.terms.dimensions import RATE, TIME
from specgate.terms.expressions import PercentOf, as_dimension
from specgate.terms.unit import Unit

_SECOND = Unit("s", fmpq(1), 0, TIME)
_FREQUENCY = Unit("rad/s", fmpq(1), 0, RATE)


class ArgumentCheck:
    """The checks of the arguments of a measure on a subject."""

    def __init__(self, about: About, measure: Measure, values: Values) -> None:
        self.about, self.measure, self.values = about, measure, values

    def argument(self, name: str, value: Value) -> None:
        """Check an argument by its kind. Raises Fault."""
        kind = next((argument.kind for argument in self.measure.arguments if argument.name == name), None)
        if kind == "band":
            self._band(value)
        elif kind == "fraction":
            self._fraction(name, value)
        elif kind == "time":
            wants(value, _SECOND, self.values)
            if evaluate(value, self.values) < 0:
                raise Fault(faults.VALUE, f"`{value.as_written}`: time counts from the input on", value.place)
        elif kind == "frequency":
            self._frequency(value)

    def over(self, ends: tuple[Value, Value]) -> None:
        """Check a range of frequencies. Raises Fault."""
        for value in ends:
            self._frequency(value)
        if evaluate(ends[0], self.values) > evaluate(ends[1], self.values):
            written = ", ".join(value.as_written for value in ends)
            raise Fault(
                faults.VALUE, f"nothing lies in the range [{written}]: the lower end comes first", ends[0].place
            )

    def _frequency(self, value: Value) -> None:
        refuse_written_rate(value, self.values)
        wants(value, _FREQUENCY, self.values)
        if evaluate(value, self.values) < 0:
            raise Fault(faults.VALUE, f"`{value.as_written}`: a frequency is not negative", value.place)

    def _band(self, value: Value) -> None:
        refuse_ambiguous(value, self.about.unit)
        relative = relative_to_change(value)
        if relative is None:
            self._of_span(value)
            unit = self.about.unit
            inferred = infer(value, self.values, None, unit.dimension)
            if as_dimension(inferred) != unit.dimension:
                raise Fault(
                    faults.DIMENSION,
                    f"`{value.as_written}`: a band is in % of the change or in {unit.symbol}, "
                    f"this is {shown(value, inferred)}",
                    value.place,
                )
            refuse_unsaid(value, unit, self.values)
        if (evaluate(value, self.values, None, self.about.span) if relative is None else relative) <= 0:
            raise Fault(faults.VALUE, f"`{value.as_written}`: a band is wider than zero", value.place)

    def _of_span(self, value: Value) -> None:
        spanned = any(isinstance(node, PercentOf) and node.name == "span" for node in value.expression.walk())
        if spanned and self.about.span is None:
            message = f"`{value.as_written}`: the signal has no `span: [low, high]` to take a part of"
            raise Fault(faults.DIMENSION, message, value.place)

    def _fraction(self, name: str, value: Value) -> None:
        fraction = relative_to_change(value)
        if fraction is None or not 0 <= fraction <= 1:
            message = f"`{value.as_written}`: `{name}` is in % of the change, from 0 to 100 %"
            raise Fault(faults.DIMENSION, message, value.place)
