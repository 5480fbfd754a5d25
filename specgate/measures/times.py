"""Times of a step response, counted from the start of the input."""

from __future__ import annotations

from flint import fmpq

from specgate.measures.inputs import ENDING
from specgate.measures.measure import Argument, Arguments, Measure, UnitRule
from specgate.measures.reading import change, difference, in_time, no_change
from specgate.response.answers import Answer
from specgate.response.questions import TimeResponse


def _settling_time(response: TimeResponse, arguments: Arguments) -> Answer:
    band = arguments.band
    if band is None:
        raise ValueError("settling_time needs the argument `band`")
    final = change(response)
    if isinstance(final, Answer):
        return final
    if not band.relative:
        return response.settling(band.size)
    if final == 0:
        return no_change("a band in per cent of the change has no width", "state the band in the signal's unit")
    return response.settling(band.size * abs(final))


def _arrival(response: TimeResponse, fraction: fmpq) -> Answer:
    """Return the first time at which the fraction of the change is reached."""
    final = change(response)
    if isinstance(final, Answer):
        return final
    if final == 0:
        return no_change("no part of the change is ever reached", "limit peak_deviation or settling_time instead")
    if fraction == 0:
        return Answer.of_exact(0)
    return response.first_arrival(final * fraction)


def _rise_time(response: TimeResponse, arguments: Arguments) -> Answer:
    if not 0 <= arguments.lower < arguments.upper <= 1:
        raise ValueError("rise time needs 0 % <= from < to <= 100 %")
    return difference(_arrival(response, arguments.upper), _arrival(response, arguments.lower))


def _delay_time(response: TimeResponse, _: Arguments) -> Answer:
    return _arrival(response, fmpq(1, 2))


def _peak_time(response: TimeResponse, _: Arguments) -> Answer:
    final = change(response)
    if isinstance(final, Answer):
        return final
    if final == 0:
        return no_change("there is no direction in which to look for a peak", "limit peak_deviation instead")
    return (response.greatest() if final > 0 else response.least()).time


_STEP = "the response does not settle, or its change is zero"

ROWS = (
    Measure(
        name="settling_time",
        title="Settling time",
        subjects=("response",),
        unit=UnitRule.SECOND,
        definition=(
            "Time from the start of the input until the response has entered the band about its final value and never "
            "leaves it again. A band in per cent is of the change from the steady value before the step to the final "
            "value, to either side; a band in the signal's unit is a distance to either side. Touching the edge of "
            "the band is inside it."
        ),
        absent_when="the response does not settle; or the change is zero and the band is in per cent of it",
        source="IEC 60050-351:2013, 351-45-37 (settling time)",
        method="enclosed: the last crossing of the band, searched backwards from a proved bound of the tail",
        read=in_time(_settling_time),
        arguments=(Argument("band", "band", "half-width of the band about the final value", required=True),),
        always=True,
        inputs=ENDING,
    ),
    Measure(
        name="rise_time",
        title="Rise time",
        subjects=("response",),
        unit=UnitRule.SECOND,
        definition=(
            "Time from the first arrival at the lower percentage of the change to the first arrival at the upper one; "
            "10 % and 90 % unless said otherwise. 0 % is the start of the input; 100 % is reached only by a response "
            "that gets to its final value and does not merely approach it. A jump at the step reaches every "
            "percentage that it covers at once."
        ),
        absent_when=_STEP,
        source=(
            "difference of two step response times (IEC 60050-351:2013, 351-45-36: first arrival at a stated "
            "percentage of the change)"
        ),
        method="enclosed: both first crossings, searched forwards from the step",
        read=in_time(_rise_time),
        arguments=(
            Argument("from", "fraction", "percentage of the change at which counting begins; 10 % unless given"),
            Argument("to", "fraction", "percentage of the change at which counting ends; 90 % unless given"),
        ),
        always=True,
        inputs=ENDING,
    ),
    Measure(
        name="delay_time",
        title="Delay time",
        subjects=("response",),
        unit=UnitRule.SECOND,
        definition="Time from the start of the input to the first arrival at half of the change.",
        absent_when=_STEP,
        source="step response time of IEC 60050-351:2013, 351-45-36, for 50 %",
        method="enclosed: the first crossing, searched forwards from the step",
        read=in_time(_delay_time),
        always=True,
        inputs=ENDING,
    ),
    Measure(
        name="peak_time",
        title="Peak time",
        subjects=("response",),
        unit=UnitRule.SECOND,
        definition=(
            "The first time at which the response takes its greatest value in the direction of the change. Zero where "
            "that value is the jump at the step."
        ),
        absent_when=f"{_STEP}; or the greatest value is only approached and never taken",
        source="specgate's own definition",
        method="enclosed: the proved bracket of the extreme",
        read=in_time(_peak_time),
        always=True,
        inputs=ENDING,
    ),
)
