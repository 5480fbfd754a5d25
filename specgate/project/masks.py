"""Masks: their corners checked against what they are laid over, and evaluated."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise
from typing import Literal

from flint import fmpq

from specgate.project import faults
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault
from specgate.project.parameters import Values, evaluate, infer
from specgate.project.percent import refuse_ambiguous, relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.subsystem_checks import wants
from specgate.project.types import Corner, MaskDefinition, Value
from specgate.response.questions import Mask, Points
from specgate.terms.dimensions import DIMENSIONLESS, RATE, TIME
from specgate.terms.expressions import PercentOf, as_dimension, literal_unit
from specgate.terms.unit import Unit

_SECOND = Unit("s", fmpq(1), 0, TIME)
_FREQUENCY = Unit("rad/s", fmpq(1), 0, RATE)

Over = Literal["time", "frequency"]


def laid_over(mask: MaskDefinition, values: Values) -> Over:
    """Return what a mask is laid over: as it says, else as its first corner tells. Raises Fault."""
    if mask.over is not None:
        return mask.over
    first = (*mask.upper, *mask.lower)[0].at
    return "frequency" if as_dimension(infer(first, values)) == RATE else "time"


def check_mask(mask: MaskDefinition, signal: Unit | None, values: Values, *, spanned: bool) -> None:
    """See that a mask fits what it is laid over: a signal in its unit, or a break (None). Raises Fault.

    spanned: whether the signal has a span.
    """
    over = laid_over(mask, values)
    if signal is None and over == "time":
        raise Fault(faults.VALUE, f"the mask `{mask.name}` is laid over time, a break over frequency", mask.place)
    for corners in (mask.upper, mask.lower):
        _check_order(mask, corners, over, values)
        if over == "frequency":
            _check_logarithmic(corners, values)
        for corner in corners:
            if over == "frequency":
                _check_gain(corner.limit, values)
            else:
                assert signal is not None
                _check_limit(corner.limit, signal, values, spanned=spanned)
    _check_alike(mask, over, values)


def _check_order(mask: MaskDefinition, corners: tuple[Corner, ...], over: Over, values: Values) -> None:
    for corner in corners:
        if over == "frequency":
            refuse_written_rate(corner.at, values)
        wants(corner.at, _FREQUENCY if over == "frequency" else _SECOND, values)
        if evaluate(corner.at, values) < 0:
            raise Fault(faults.VALUE, f"`{corner.at.as_written}`: a mask begins at zero or later", corner.at.place)
    for before, after in pairwise(corners):
        if evaluate(after.at, values) < evaluate(before.at, values):
            message = f"`{after.at.as_written}` comes before `{before.at.as_written}`: corners stand in their order"
            raise Fault(faults.VALUE, message, after.at.place)
    if corners and not mask.forever and evaluate(corners[0].at, values) == evaluate(corners[-1].at, values):
        message = f"the mask `{mask.name}` ends where it begins: give it a second corner, or `to: forever`"
        raise Fault(faults.VALUE, message, corners[0].at.place)


def _check_limit(limit: Value, signal: Unit, values: Values, *, spanned: bool) -> None:
    """Check a limit over time: in the signal's unit, in % of the change or of the span. Raises Fault."""
    refuse_ambiguous(limit, signal)
    if relative_to_change(limit) is not None:
        return
    if not spanned and any(isinstance(node, PercentOf) and node.name == "span" for node in limit.expression.walk()):
        message = f"`{limit.as_written}`: the signal has no `span: [low, high]` to take a part of"
        raise Fault(faults.DIMENSION, message, limit.place)
    inferred = infer(limit, values, None, signal.dimension)
    if as_dimension(inferred) != signal.dimension and not _zero(limit, values):
        message = f"`{limit.as_written}`: a limit is in {signal.symbol} or % of the change, this is "
        raise Fault(faults.DIMENSION, message + shown(limit, inferred), limit.place)
    if not _zero(limit, values):
        refuse_unsaid(limit, signal, values)


def _check_gain(limit: Value, values: Values) -> None:
    """Check a limit over frequency: a ratio, plain or in dB. Raises Fault."""
    inferred = infer(limit, values)
    if as_dimension(inferred) != DIMENSIONLESS:
        message = f"`{limit.as_written}`: a gain is limited in dB or by a plain ratio, this is {shown(limit, inferred)}"
        raise Fault(faults.DIMENSION, message, limit.place)
    if evaluate(limit, values) < 0:
        raise Fault(faults.VALUE, f"`{limit.as_written}`: a gain is not negative", limit.place)


def _check_alike(mask: MaskDefinition, over: Over, values: Values) -> None:
    """See that lines between corners are of one kind. Raises Fault."""
    alike = _in_decibel if over == "frequency" else _relative
    limits = [limit for limit in _limits(mask) if over == "frequency" or not _zero(limit, values)]
    kinds = {alike(limit) for limit in limits}
    if len(kinds) > 1:
        odd = next(limit for limit in limits if alike(limit) != alike(limits[0]))
        what = "in dB or as plain ratios" if over == "frequency" else "in % of the change or in the signal's unit"
        message = f"`{odd.as_written}`: give all limits of the mask `{mask.name}` {what}, not some and some"
        raise Fault(faults.DIMENSION, message, odd.place)


def _check_logarithmic(corners: tuple[Corner, ...], values: Values) -> None:
    """See that no line in dB begins at zero frequency, unless it is level. Raises Fault."""
    for first, second in pairwise(corners):
        level = evaluate(first.limit, values) == evaluate(second.limit, values)
        if evaluate(first.at, values) == 0 < evaluate(second.at, values) and _in_decibel(first.limit) and not level:
            message = (
                f"`{first.at.as_written}`: lines in dB are straight over the logarithm of frequency, which has no zero"
            )
            raise Fault(faults.VALUE, message, first.at.place)


def mask_of(mask: MaskDefinition, values: Values, span: fmpq | None) -> tuple[Mask, bool]:
    """Return a mask with its values, coherent SI, and whether its limits are parts of the change. Raises Fault."""
    over = laid_over(mask, values)
    relative = over == "time" and any(_relative(limit) and not _zero(limit, values) for limit in _limits(mask))
    upper, lower = (_points(corners, values, span) for corners in (mask.upper, mask.lower))
    logarithmic = over == "frequency" and any(map(_in_decibel, _limits(mask)))
    return Mask(upper, lower, mask.forever, logarithmic), relative


def _points(corners: tuple[Corner, ...], values: Values, span: fmpq | None) -> Points:
    return tuple((evaluate(corner.at, values), _number(corner.limit, values, span)) for corner in corners)


def _number(limit: Value, values: Values, span: fmpq | None) -> fmpq:
    relative = relative_to_change(limit)
    return evaluate(limit, values, None, span) if relative is None else relative


def _limits(mask: MaskDefinition) -> Iterator[Value]:
    return (corner.limit for corner in (*mask.upper, *mask.lower))


def _relative(limit: Value) -> bool:
    return relative_to_change(limit) is not None


def _in_decibel(limit: Value) -> bool:
    unit = literal_unit(limit.expression)
    return unit is not None and unit.kind == "decibel"


def _zero(limit: Value, values: Values) -> bool:
    """Whether a limit is zero, in whatever unit."""
    relative = relative_to_change(limit)
    if relative is not None:
        return relative == 0
    spanned = any(isinstance(node, PercentOf) and node.name == "span" for node in limit.expression.walk())
    return not spanned and evaluate(limit, values) == 0


__all__ = ["check_mask", "laid_over", "mask_of"]
