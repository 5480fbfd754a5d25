"""Masks: what they are laid over, and their corners evaluated."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from flint import fmpq

from specgate.project.parameters import Values, evaluate, infer
from specgate.project.percent import relative_to_change
from specgate.project.types import Corner, MaskDefinition, Value
from specgate.response.questions import Mask, Points
from specgate.terms.dimensions import RATE
from specgate.terms.expressions import PercentOf, as_dimension, literal_unit

Over = Literal["time", "frequency"]


def laid_over(mask: MaskDefinition, values: Values) -> Over:
    """Return what a mask is laid over: as it says, else as its first corner tells. Raises Fault."""
    if mask.over is not None:
        return mask.over
    first = (*mask.upper, *mask.lower)[0].at
    return "frequency" if as_dimension(infer(first, values)) == RATE else "time"


def mask_of(mask: MaskDefinition, values: Values, span: fmpq | None) -> tuple[Mask, bool]:
    """Return a mask with its values, coherent SI, and whether its limits are parts of the change. Raises Fault."""
    over = laid_over(mask, values)
    relative = over == "time" and any(is_relative(limit) and not is_zero(limit, values) for limit in limits_of(mask))
    upper, lower = (_points(corners, values, span) for corners in (mask.upper, mask.lower))
    logarithmic = over == "frequency" and any(map(in_decibel, limits_of(mask)))
    return Mask(upper, lower, mask.forever, logarithmic), relative


def _points(corners: tuple[Corner, ...], values: Values, span: fmpq | None) -> Points:
    return tuple((evaluate(corner.at, values), _number(corner.limit, values, span)) for corner in corners)


def _number(limit: Value, values: Values, span: fmpq | None) -> fmpq:
    relative = relative_to_change(limit)
    return evaluate(limit, values, None, span) if relative is None else relative


def limits_of(mask: MaskDefinition) -> Iterator[Value]:
    """Give the limits at all corners of a mask."""
    return (corner.limit for corner in (*mask.upper, *mask.lower))


def is_relative(limit: Value) -> bool:
    """Whether a limit is in per cent of the change."""
    return relative_to_change(limit) is not None


def in_decibel(limit: Value) -> bool:
    """Whether a limit is written in dB."""
    unit = literal_unit(limit.expression)
    return unit is not None and unit.kind == "decibel"


def is_zero(limit: Value, values: Values) -> bool:
    """Whether a limit is zero, in whatever unit."""
    relative = relative_to_change(limit)
    if relative is not None:
        return relative == 0
    return not of_span(limit) and evaluate(limit, values) == 0


def of_span(limit: Value) -> bool:
    """Whether a limit is in per cent of the signal's span."""
    return any(isinstance(node, PercentOf) and node.name == "span" for node in limit.expression.walk())


__all__ = ["in_decibel", "is_relative", "is_zero", "laid_over", "limits_of", "mask_of", "of_span"]
