"""From the unit in which a limit or a claim was written to that of a picture's axis."""

from __future__ import annotations

from functools import cache


@cache
def ratio(unit: str, to: str) -> float | None:
    """Return what a number in `unit` is multiplied by to be in `to`; None where they do not measure the same.

    Per cent of something, decibels and a project's own units are not converted: the picture leaves them out.
    """
    if unit == to:
        return 1.0
    from specgate.terms.units import UnitError, UnitTable

    table = UnitTable.standard()
    try:
        one, other = table.parse(unit), table.parse(to)
    except UnitError:
        return None
    if one.dimension != other.dimension or one.angle != other.angle:
        return None
    if "decibel" in (one.kind, other.kind) or one.kind == "percent":
        return None
    quotient = one.si_factor / other.si_factor
    return int(quotient.p) / int(quotient.q)
