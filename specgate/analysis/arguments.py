"""Arguments of a criterion, evaluated; and how they are said."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq

from specgate.measures.measure import Arguments, Band, Measure, UnitRule
from specgate.project.masks import laid_over, mask_of
from specgate.project.parameters import Values, evaluate
from specgate.project.percent import relative_to_change
from specgate.project.types import Criterion, Value
from specgate.terms.expressions import Number

ALWAYS = Arguments(band=Band(fmpq(1, 50), relative=True))
"""What measures are read with where nobody asked for them."""

ALWAYS_SAID: Mapping[str, Mapping[str, str]] = {
    "settling_time": {"band": "2 % of the change"},
    "rise_time": {"from": "10 % of the change", "to": "90 % of the change"},
}
"""The same in words, by measure."""


def arguments(criterion: Criterion, measure: Measure, values: Values, span: fmpq | None) -> Arguments:
    """Evaluate the arguments of a criterion (coherent SI). Raises Fault.

    span: high minus low of the signal's span, for `% of span`.
    """
    given = criterion.arguments
    mask, relative = (None, False) if criterion.mask is None else mask_of(criterion.mask, values, span)
    laid = "time" if criterion.mask is None else laid_over(criterion.mask, values)
    band, time, frequency = given.get("band"), given.get("time"), given.get("frequency")
    return Arguments(
        band=None if band is None else Band(number(band, values, span), relative_to_change(band) is not None),
        lower=_fraction(given.get("from"), ALWAYS.lower, values),
        upper=_fraction(given.get("to"), ALWAYS.upper, values),
        absolute=measure.unit is UnitRule.CHANGE and not any(map(_relative, criterion.limit.values)),
        time=None if time is None else evaluate(time, values),
        frequency=None if frequency is None else evaluate(frequency, values),
        over=None
        if criterion.over is None
        else (evaluate(criterion.over[0], values), evaluate(criterion.over[1], values)),
        mask=mask,
        relative=relative,
        laid_over=laid,
        measure=measure.name,
    )


def said(criterion: Criterion) -> Mapping[str, str]:
    """Return the arguments in words, by name; defaults that were not written included."""
    written = {name: _said(name, value) for name, value in criterion.arguments.items()}
    defaults = ALWAYS_SAID["rise_time"] if criterion.measure == "rise_time" else {}
    over = {} if criterion.over is None else {"over": " to ".join(end.as_written for end in criterion.over)}
    mask = {} if criterion.mask is None else {"mask": criterion.mask.name}
    return {**defaults, **written, **over, **mask}


def number(value: Value, values: Values, span: fmpq | None = None) -> fmpq:
    """Evaluate a value that may be in per cent of the change, which then is the fraction itself. Raises Fault."""
    relative = relative_to_change(value)
    return evaluate(value, values, span=span) if relative is None else relative


def _said(name: str, value: Value) -> str:
    literal = name in ("band", "from", "to") and isinstance(value.expression, Number)
    plain = literal and relative_to_change(value) is not None
    return f"{value.as_written} of the change" if plain else value.as_written


def _relative(value: Value) -> bool:
    return relative_to_change(value) is not None


def _fraction(value: Value | None, otherwise: fmpq, values: Values) -> fmpq:
    return otherwise if value is None else number(value, values)
