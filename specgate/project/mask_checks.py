"""Checks of masks against what they are laid over: corners, their order, their limits."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial
from itertools import pairwise

from flint import fmpq

from specgate.project import faults
from specgate.project.about import About
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault
from specgate.project.masks import in_decibel, is_relative, is_zero, laid_over, limits_of, of_span
from specgate.project.parameters import Values, evaluate, infer
from specgate.project.percent import refuse_ambiguous, relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.subsystem_checks import wants
from specgate.project.types import Corner, MaskDefinition, Value
from specgate.terms.dimensions import DIMENSIONLESS, RATE, TIME
from specgate.terms.expressions import as_dimension
from specgate.terms.unit import Unit

_SECOND = Unit("s", fmpq(1), 0, TIME)
_FREQUENCY = Unit("rad/s", fmpq(1), 0, RATE)


def mask_checks(mask: MaskDefinition, about: About, values: Values) -> Iterator[Callable[[], object]]:
    """Give the checks of a mask on what it is laid over that do not depend on one another; each raises Fault."""
    if not about.of_response and mask.over == "time":
        yield partial(_refuse_time, mask)
        return
    for corners in (mask.upper, mask.lower):
        for corner in corners:
            yield partial(_check_place, mask, corner, values)
            yield partial(_check_limit, mask, corner.limit, about, values)
        yield partial(_check_order, mask, corners, values)
    yield partial(_check_alike, mask, values)


def _refuse_time(mask: MaskDefinition) -> None:
    raise Fault(faults.VALUE, f"the mask `{mask.name}` is laid over time, a break over frequency", mask.place)


def _check_place(mask: MaskDefinition, corner: Corner, values: Values) -> None:
    """Check the time or frequency of a corner. Raises Fault."""
    over = laid_over(mask, values)
    if over == "frequency":
        refuse_written_rate(corner.at, values)
    wants(corner.at, _FREQUENCY if over == "frequency" else _SECOND, values)
    if evaluate(corner.at, values) < 0:
        raise Fault(faults.VALUE, f"`{corner.at.as_written}`: a mask begins at zero or later", corner.at.place)


def _check_order(mask: MaskDefinition, corners: tuple[Corner, ...], values: Values) -> None:
    places = [evaluate(corner.at, values) for corner in corners]
    for number, (before, after) in enumerate(pairwise(corners)):
        if places[number + 1] < places[number]:
            message = f"`{after.at.as_written}` comes before `{before.at.as_written}`: corners stand in their order"
            raise Fault(faults.VALUE, message, after.at.place)
        if number > 0 and places[number - 1] == places[number + 1]:
            message = (
                f"`{after.at.as_written}` stands three times: two corners at one place are a jump from one limit to "
                "the other, which leaves no room for a third"
            )
            raise Fault(faults.VALUE, message, after.at.place)
    if corners and not mask.forever and places[0] == places[-1]:
        message = f"the mask `{mask.name}` ends where it begins: give it a second corner, or `to: forever`"
        raise Fault(faults.VALUE, message, corners[0].at.place)
    if laid_over(mask, values) == "frequency":
        _check_logarithmic(corners, values)


def _check_limit(mask: MaskDefinition, limit: Value, about: About, values: Values) -> None:
    """Check the limit at a corner. Raises Fault."""
    if laid_over(mask, values) == "frequency":
        _check_gain(limit, values)
    elif about.of_response:
        _check_deviation(limit, about, values)
    else:
        _refuse_time(mask)


def _check_deviation(limit: Value, about: About, values: Values) -> None:
    """Check a limit over time: in the signal's unit, in % of the change or of the span. Raises Fault."""
    signal = about.unit
    refuse_ambiguous(limit, signal)
    if relative_to_change(limit) is not None:
        return
    if of_span(limit) and about.span is None:
        message = f"`{limit.as_written}`: the signal has no `span: [low, high]` to take a part of"
        raise Fault(faults.DIMENSION, message, limit.place)
    inferred = infer(limit, values, None, signal.dimension)
    if as_dimension(inferred) != signal.dimension and not is_zero(limit, values):
        message = f"`{limit.as_written}`: a limit is in {signal.symbol} or % of the change, this is "
        raise Fault(faults.DIMENSION, message + shown(limit, inferred), limit.place)
    if not is_zero(limit, values):
        refuse_unsaid(limit, signal, values)


def _check_gain(limit: Value, values: Values) -> None:
    """Check a limit over frequency: a ratio, plain or in dB. Raises Fault."""
    inferred = infer(limit, values)
    if as_dimension(inferred) != DIMENSIONLESS:
        message = f"`{limit.as_written}`: a gain is limited in dB or by a plain ratio, this is {shown(limit, inferred)}"
        raise Fault(faults.DIMENSION, message, limit.place)
    if evaluate(limit, values) < 0:
        raise Fault(faults.VALUE, f"`{limit.as_written}`: a gain is not negative", limit.place)


def _check_alike(mask: MaskDefinition, values: Values) -> None:
    """See that lines between corners are of one kind. Raises Fault."""
    over = laid_over(mask, values)
    alike = in_decibel if over == "frequency" else is_relative
    limits = [limit for limit in limits_of(mask) if over == "frequency" or not is_zero(limit, values)]
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
        if evaluate(first.at, values) == 0 < evaluate(second.at, values) and in_decibel(first.limit) and not level:
            message = (
                f"`{first.at.as_written}`: lines in dB are straight over the logarithm of frequency, which has no zero"
            )
            raise Fault(faults.VALUE, message, first.at.place)
