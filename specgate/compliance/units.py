"""In which unit a result is printed, and what it is small against."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from functools import cache

from flint import fmpq

from specgate.measures.measure import Arguments, Measure, UnitRule
from specgate.measures.subjects import ResponseSubject
from specgate.project.parameters import Values
from specgate.project.types import Limit
from specgate.response.answers import Absent
from specgate.response.questions import TimeResponse
from specgate.terms.enclosed import ends, rounded
from specgate.terms.expressions import Expression, Name, Number, literal_unit
from specgate.terms.unit import Unit
from specgate.terms.units import UnitTable

_FIXED = {
    UnitRule.SECOND: "s",
    UnitRule.RATIO: "1",
    UnitRule.DECIBEL: "dB",
    UnitRule.DEGREE: "deg",
    UnitRule.RADIAN_PER_SECOND: "rad/s",
    UnitRule.PER_SECOND: "1/s",
    UnitRule.PER_SECOND_SQUARED: "1/s^2",
}


def limit_unit(limit: Limit, values: Values) -> Unit | None:
    """Return the unit that a limit is written in, that of the parameter where it is one; None where it has none."""
    return written_unit(limit.values[0].expression, values) if limit.values else None


def written_unit(expression: Expression, values: Values) -> Unit | None:
    """Return the unit that a value is written in, that of the parameter where it is one; None where it has none."""
    written = _written(expression, values)
    return None if written is None else literal_unit(written)


def is_plain(limit: Limit, values: Values) -> bool:
    """Whether a limit is written as a number without a unit: of a gain it is a ratio then, not decibels."""
    written = _written(limit.values[0].expression, values) if limit.values else None
    return isinstance(written, Number) and written.unit is None


def _written(expression: Expression, values: Values) -> Expression | None:
    """Return an expression as it is written, where it is a parameter that of the parameter."""
    if not isinstance(expression, Name):
        return expression
    qualified = values.scopes[None].get(expression.name)
    return None if qualified is None else values.written[qualified][0]


def default_unit(measure: Measure, arguments: Arguments, signal: Unit) -> Unit | None:
    """Return the unit of a result that no limit gives one to; None for whole numbers and yes/no."""
    rule = measure.unit
    if rule in (UnitRule.COUNT, UnitRule.YES_NO):
        return None
    if rule in _FIXED:
        return _unit(_FIXED[rule])
    if rule is UnitRule.CHANGE and not arguments.absolute:
        return _unit("%")
    of_signal = _OF_SIGNAL.get(rule)
    return signal if of_signal is None else of_signal(signal)


@cache
def _unit(symbol: str) -> Unit:
    return UnitTable.standard().parse(symbol)


_OF_SIGNAL: Mapping[UnitRule, Callable[[Unit], Unit]] = {
    UnitRule.SIGNAL_RATE: lambda signal: signal / _unit("s"),
    UnitRule.SIGNAL_SECOND: lambda signal: signal * _unit("s"),
    UnitRule.SIGNAL_SQUARED_SECOND: lambda signal: signal**2 * _unit("s"),
}


def smallness(measure: Measure, arguments: Arguments, subject: object, unit: Unit | None) -> fmpq | None:
    """Return what a result in `unit` is small against: the change of the response, or its peak where that is zero.

    None for times, ratios of the loop and everything else that has nothing to be compared with.
    """
    if unit is None or unit.kind == "decibel" or measure.unit not in (UnitRule.SIGNAL, UnitRule.CHANGE):
        return None
    if measure.unit is UnitRule.CHANGE and not arguments.absolute:
        return 1 / unit.si_factor
    if not isinstance(subject, ResponseSubject) or isinstance(subject.response, Absent):
        return None
    size = _size(subject.response)
    return None if size is None else size / unit.si_factor


def _size(response: TimeResponse) -> fmpq | None:
    final = response.final_value()
    if final.exact is not None and final.exact != 0:
        return abs(final.exact)
    peak = response.peak_deviation().value
    if peak.absent is not None:
        return None
    # Two digits, rounded up: the last bits of a ball must not decide what prints as zero.
    high = rounded(ends(peak.enclose(64))[1], "up", 2)
    return high if high > 0 else None
