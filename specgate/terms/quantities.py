"""One quantity as written: a number in a unit."""

from __future__ import annotations

from dataclasses import dataclass

from flint import fmpq

from specgate.terms.expressions import ExpressionError, Number, evaluate, parse
from specgate.terms.unit import ONE, PI, Unit
from specgate.terms.units import UnitTable


@dataclass(frozen=True)
class Quantity:
    """A value with the unit that it was written in.

    value: coherent SI; but decibels where the unit is dB, because their ratio is irrational and is compared as a ball.
    """

    value: fmpq
    unit: Unit
    as_written: str

    @property
    def number(self) -> fmpq:
        """The value counted in `unit`."""
        return self.value / self.unit.si_factor


def quantity(text: str, units: UnitTable, pi: fmpq = PI) -> Quantity:
    """Read a number with its unit (`85 ms`), a plain number being in unit 1. Raises ExpressionError."""
    node = parse(text, units)
    if not isinstance(node, Number):
        raise ExpressionError(f"a number and a unit are wanted, not `{text[:40]}`", 0)
    unit = node.unit or ONE
    value = node.value if unit.kind == "decibel" else evaluate(node, {}, pi)
    return Quantity(value, unit, text)
