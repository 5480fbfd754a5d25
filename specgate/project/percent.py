"""Per cent of what: of the change, of the signal's span, of a parameter; never of nothing in particular."""

from __future__ import annotations

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.types import Value
from specgate.terms.expressions import Number, PercentOf, is_read, literal_unit
from specgate.terms.unit import Unit


def relative_to_change(value: Value) -> fmpq | None:
    """Return the fraction if a value is in per cent of the change (`2 %`, `2 % of change`), else None.

    Raises a repeating Fault for a value that could not be read.
    """
    expression = value.expression
    if not is_read(expression):
        raise Fault(faults.VALUE, f"`{value.as_written}` could not be read", value.place, repeats=True)
    if isinstance(expression, PercentOf) and expression.name == "change":
        return expression.percent / 100
    unit = literal_unit(expression)
    if isinstance(expression, Number) and unit is not None and unit.kind == "percent":
        return expression.value / 100
    return None


def refuse_ambiguous(value: Value, signal: Unit, *, of_signal: bool = True) -> None:
    """Refuse a plain `%` where the signal's own unit is %. Raises Fault.

    of_signal: whether parts of the change and of the span can be meant here.
    """
    written = (node.unit for node in value.expression.walk() if isinstance(node, Number))
    if signal.kind in ("percent", "points") and any(unit is not None and unit.kind == "percent" for unit in written):
        number = value.as_written.replace("%", "").strip()
        others = f"`{number} % of change`, `{number} % of span`, " if of_signal else ""
        raise Fault(
            faults.DIMENSION,
            f"`{value.as_written}` of what? The signal itself is in {signal.symbol}: write `{number} points` for "
            f"percentage points, or {others}`{number} % of` a parameter",
            value.place,
        )
