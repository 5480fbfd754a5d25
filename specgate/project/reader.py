"""How the model of one subsystem gets at its coefficients, and which unit plain numbers carry."""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq, fmpq_poly

from specgate.project import faults
from specgate.project.counting import shown, shown_ratio
from specgate.project.faults import Fault
from specgate.project.parameters import Values, depends_on_pi, evaluate, infer
from specgate.project.types import Polynomial, Port, Subsystem, Value
from specgate.terms.dimensions import DIMENSIONLESS, TIME, Dimension
from specgate.terms.expressions import PLAIN, Inferred, Number, as_dimension

S = fmpq_poly([0, 1])
"""The variable s."""
HIGHEST_ORDER = 100
"""Highest power of s, and most states, of one subsystem: more is no model that a person has written."""


class ModelReader:
    """Reads the values of one subsystem and remembers what they rest on.

    rounded: a value that was read, or a conversion, rests on the decimal for pi. by_fit: a plain number was taken
    to carry a unit that fits.
    """

    def __init__(self, subsystem: Subsystem, values: Values) -> None:
        self.subsystem, self.values = subsystem, values
        self.rounded = False
        self.by_fit = False

    def number(self, value: Value) -> fmpq:
        """Return a value in coherent SI. Raises Fault."""
        self.rounded = self.rounded or depends_on_pi(value.expression, self.values, self.subsystem.name)
        return evaluate(value, self.values, self.subsystem.name)

    def infer(self, value: Value) -> Inferred:
        """Return the dimension of a value. Raises Fault."""
        return infer(value, self.values, self.subsystem.name)

    def shown_ratio(self, output: str, source: str, time: Dimension = DIMENSIONLESS) -> str:
        """Name the unit that a transfer function from an input to an output has, times a power of time."""
        return shown_ratio(self._output(output).unit, self._input(source).unit, time)

    def ratio(self, output: str, source: str) -> Dimension:
        """Return the dimension that a transfer function from an input to an output has."""
        return self._output(output).unit.dimension / self._input(source).unit.dimension

    def conversion(self, output: str, source: str) -> fmpq:
        """Return what a plain gain counted in the declared units has to be multiplied by to be coherent SI."""
        above, below = self._output(output).unit, self._input(source).unit
        self.rounded = self.rounded or above.pi_power != below.pi_power
        return above.factor_with(self.values.pi) / below.factor_with(self.values.pi)

    def check_order(self, *orders: int) -> None:
        """Refuse a model that is too large to be meant. Raises Fault."""
        if max(orders) > HIGHEST_ORDER:
            message = f"a model of order {max(orders)} is more than the {HIGHEST_ORDER} that are worked with"
            raise Fault(faults.VALUE, message, self.subsystem.model_place)

    def polynomial(self, coefficients: Polynomial) -> fmpq_poly:
        """Return a polynomial in s from its coefficients, highest power first. Raises Fault."""
        return fmpq_poly([self.number(value) for value in reversed(coefficients)])

    def polynomial_dimension(self, coefficients: Polynomial) -> Inferred:
        """Return the dimension that all terms share once s is 1/second; PLAIN if no coefficient has a unit.

        Raises Fault for the first term that differs from the first one with a unit.
        """
        terms = [
            (value, power, self.infer(value))
            for power, value in zip(range(len(coefficients) - 1, -1, -1), coefficients, strict=True)
            if not is_zero(value)
        ]
        united = next((term for term in terms if term[2] is not PLAIN), None)
        if united is None:
            return PLAIN
        common = as_dimension(united[2]) / TIME ** united[1]
        for value, power, inferred in terms:
            wanted = common * TIME**power
            if as_dimension(inferred) != wanted:
                raise Fault(faults.DIMENSION, _odd_term(value, power, inferred, united[0], wanted), value.place)
        return common

    def wants(
        self,
        value: Value,
        wanted: Dimension,
        what: str,
        plain_as: str | None = None,
        name: Callable[[], str] | None = None,
    ) -> None:
        """Check the dimension of a value. Raises Fault.

        plain_as: the unit that a plain number is taken in. name: makes the name of the unit that is wanted, which costs
        more than all checks together and is needed only where one fails.
        """
        inferred = self.infer(value)
        if inferred is PLAIN and (plain_as is not None or is_zero(value)):
            self.by_fit = self.by_fit or (wanted != DIMENSIONLESS and not is_zero(value))
            return
        if as_dimension(inferred) != wanted:
            unit = plain_as or (name() if name else str(wanted))
            message = f"`{value.as_written}`: {what} is in {unit}, this is {shown(value, inferred)}"
            raise Fault(faults.DIMENSION, message, value.place)

    def _output(self, name: str) -> Port:
        return self.subsystem.outputs[name]

    def _input(self, name: str) -> Port:
        return self.subsystem.inputs[name]


def is_zero(value: Value) -> bool:
    """Whether a literal zero is written: it fits every dimension."""
    return isinstance(value.expression, Number) and value.expression.value == 0 and value.expression.unit is None


def _odd_term(value: Value, power: int, inferred: Inferred, beside: Value, wanted: Dimension) -> str:
    plain = " (beside a unit a plain number is dimensionless)" if inferred is PLAIN else ""
    said = str(inferred) if inferred is PLAIN else f"in {shown(value, inferred)}"
    return (
        f"`{value.as_written}`, the coefficient of s^{power}, is {said}{plain}; "
        f"beside `{beside.as_written}` it has to be in {wanted}"
    )
