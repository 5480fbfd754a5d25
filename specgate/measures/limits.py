"""Measures of a whole course: masks and rates."""

from __future__ import annotations

from dataclasses import replace

from flint import fmpq

from specgate.measures.inputs import COURSE
from specgate.measures.measure import Argument, Arguments, Measure, UnitRule
from specgate.measures.reading import change, in_time, no_change, over_frequency, with_time
from specgate.measures.subjects import BreakSubject, ResponseSubject
from specgate.response.answers import Answer
from specgate.response.questions import Mask, Points, TimeResponse


def _within(subject: ResponseSubject | BreakSubject, arguments: Arguments) -> Answer:
    if isinstance(subject, BreakSubject) or arguments.laid_over == "frequency":
        return _over_frequency(subject, arguments)
    return _over_time(subject, arguments)


def _in_mask(response: TimeResponse, arguments: Arguments) -> Answer:
    mask = _mask(arguments)
    if not arguments.relative:
        return response.within(mask)
    final = change(response)
    if isinstance(final, Answer):
        return final
    if final == 0:
        return no_change("a mask in per cent of it has no limits", "state its limits in the signal's unit")
    return response.within(of_change(mask, final))


def _mask(arguments: Arguments) -> Mask:
    if arguments.mask is None:
        raise ValueError("within_mask needs the argument `mask`")
    return arguments.mask


_over_time = in_time(_in_mask)
_over_frequency = over_frequency(lambda found, arguments: found.within(_mask(arguments)))


def of_change(mask: Mask, change: fmpq) -> Mask:
    """Return a mask in parts of a change as one in the signal's unit: of a fall the upper limit is the lower one."""
    upper, lower = (_times(points, change) for points in (mask.upper, mask.lower))
    return replace(mask, upper=upper, lower=lower) if change > 0 else replace(mask, upper=lower, lower=upper)


def _times(points: Points, factor: fmpq) -> Points:
    return tuple((at, limit * factor) for at, limit in points)


_EXAMPLE = """
masks:
  opening:                     # corners [time, limit]; two at one time are a jump
    upper: [[0 s, 110 %], [2 s, 110 %], [2 s, 102 %]]
    lower: [[1 s, 0 %], [3 s, 98 %]]
    to: forever                # each last limit holds on; without it, it ends there
  loop_gain:                   # over frequency: limits in dB are straight over its logarithm
    lower: [[0.1 rad/s, 20 dB], [1 rad/s, 6 dB]]
    upper: [[30 rad/s, -6 dB], [300 rad/s, -26 dB]]
requirements:
  R-1:
    text: The opening shall stay between its limits, and the loop gain between its own.
    criteria:
      - {response: hoist.follow, measure: within_mask, mask: opening, equals: true}
      - {break: hoist.main, measure: within_mask, mask: loop_gain, equals: true}
"""

ROWS = (
    Measure(
        name="within_mask",
        title="Within a mask",
        subjects=("response", "break"),
        unit=UnitRule.YES_NO,
        definition=(
            "Whether a response stays between the two limits of a mask over time, or a gain between those of a mask "
            "over frequency. Limits are straight between their corners. Touching complies; where a limit jumps the "
            "looser one holds; before its first corner there is none, past its last one it ends unless it is said to "
            "hold for ever. The first violation is told with its time or frequency."
        ),
        absent_when="the limits are in per cent of a change that there is not",
        source="specgate's own definition",
        method=(
            "proved: over time the first crossing of each limit, searched from corner to corner; over frequency the "
            "sign of mask minus gain between the roots of exact polynomials, or zeros isolated in balls"
        ),
        read=_within,
        arguments=(Argument("mask", "mask", "name of the mask", required=True),),
        example=_EXAMPLE,
        inputs=COURSE,
    ),
    Measure(
        name="peak_rate",
        title="Peak rate",
        subjects=("response",),
        unit=UnitRule.SIGNAL_RATE,
        definition="The greatest magnitude of the rate of change of the response; without limit where it jumps.",
        absent_when="the rate grows without bound, or the response jumps (then it is infinite)",
        source="specgate's own definition",
        method="enclosed: extremes of the derivative",
        read=in_time(lambda response, _: with_time(response.peak_rate())),
        inputs=COURSE,
    ),
)
