"""In what a value counts: said in the units that people write, and refused where a plain number does not tell.

A plain number on a signal in deg would count radians, on one in % it would count wholes, and the file would look right.
"""

from __future__ import annotations

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate, written_numbers
from specgate.project.types import Value
from specgate.terms.dimensions import DIMENSIONLESS, Dimension
from specgate.terms.expressions import Inferred, PercentOf, literal_unit
from specgate.terms.unit import Unit


def shown(value: Value, inferred: Inferred) -> str:
    """Name the unit that a value is in: as it is written, else the coherent one."""
    unit = literal_unit(value.expression)
    return str(inferred) if unit is None else unit.symbol


def shown_ratio(output: Unit, source: Unit, time: Dimension = DIMENSIONLESS) -> str:
    """Name the unit of output over input, times a power of time, in their own units where those are simple."""
    dimension = output.dimension / source.dimension * time
    if time != DIMENSIONLESS or dimension == DIMENSIONLESS or set(source.symbol) & set("*/^"):
        return str(dimension)
    return (output / source).symbol


def refuse_unsaid(value: Value, unit: Unit, values: Values, scope: str | None = None) -> None:
    """Refuse a value that does not say that it counts what a unit without a dimension counts. Raises Fault.

    unit: that of the signal, or one made of it. Zero is the same in every unit.
    """
    if not unit.angle and (unit.dimension != DIMENSIONLESS or unit.factor == 1):
        return
    written = [node.unit for node in written_numbers(value.expression, values, scope) if node.unit is not None]
    of_something = any(isinstance(node, PercentOf) for node in value.expression.walk())
    if of_something or any(_counts(one, unit) for one in written) or evaluate(value, values, scope) == 0:
        return
    example = "points" if unit.kind == "percent" else unit.symbol
    raise Fault(
        faults.DIMENSION,
        f"`{value.as_written}`: what is counted here is in {unit.symbol}, and this does not say so: write {example} "
        "behind the number",
        value.place,
    )


def _counts(written: Unit, unit: Unit) -> bool:
    """Whether a unit is of the kind of another: an angle, a share of a whole, or something of the project's own."""
    if unit.angle:
        return written.angle != 0
    if unit.kind in ("percent", "points"):
        return written.kind in ("percent", "points")
    return written.kind == "linear" and not written.angle and written.dimension == unit.dimension
