"""Absolute temperatures: in `rest` and in ranges `20 degC` is a temperature, everywhere else a difference."""

from __future__ import annotations

from flint import fmpq

from specgate.project.parameters import Values, evaluate, written_numbers
from specgate.project.types import Value
from specgate.terms.dimensions import TEMPERATURE
from specgate.terms.unit import Unit


def absolute(value: Value, unit: Unit, values: Values, scope: str | None = None) -> fmpq:
    """Return a value in coherent SI, counted from the zero of a signal's own unit (0 degC for a signal in degC).

    The scale of the value is that of the first temperature written in it, parameters included: `ambient + 5 K` is
    in degC if `ambient` is. Other dimensions have only one zero. Raises Fault.
    """
    number = evaluate(value, values, scope)
    if unit.dimension != TEMPERATURE:
        return number
    written = (node.unit for node in written_numbers(value.expression, values, scope))
    scale = next((found for found in written if found is not None and found.dimension == TEMPERATURE), unit)
    return number + scale.zero - unit.zero
