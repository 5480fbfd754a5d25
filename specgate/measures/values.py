"""Values of a step response, counted from the value before the step."""

from __future__ import annotations

from specgate.measures.inputs import COURSE
from specgate.measures.measure import Argument, Arguments, Measure, UnitRule
from specgate.measures.reading import in_time
from specgate.response.answers import Answer
from specgate.response.questions import TimeResponse

_UNSETTLED = "the response does not settle"


def _value_at(response: TimeResponse, arguments: Arguments) -> Answer:
    time = arguments.time
    if time is None:
        raise ValueError("value_at needs the argument `time`")
    return response.value_at(time)


ROWS = (
    Measure(
        name="final_value",
        title="Final value",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "The steady value that the response tends to after the step, as a deviation from the value before it. "
            "It is taken only from a response that is proved to settle: the limit of s*Y(s) at s = 0 also gives a "
            "finite number where nothing settles."
        ),
        absent_when=f"{_UNSETTLED} (a pole on the imaginary axis or right of it)",
        source="IEC 60050-351:2013, steady state of a step response (351-45-27, figure 5)",
        method="exact: value of the channel at s = 0 times the size of the step, after an exact stability test",
        read=in_time(lambda response, _: response.final_value()),
        signed=True,
        always=True,
        inputs=COURSE,
    ),
    Measure(
        name="initial_value",
        title="Initial value",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "The value just after the step, as a deviation from the value before it: the jump. It is zero unless "
            "the channel passes a step on at once."
        ),
        absent_when="never, for a channel that has a step response",
        source="limit of s*Y(s) as s grows without bound",
        method="exact: ratio of the leading coefficients times the size of the step",
        read=in_time(lambda response, _: response.initial_value()),
        signed=True,
        always=True,
        inputs=COURSE,
    ),
    Measure(
        name="maximum_value",
        title="Maximum value",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "The least upper bound of the response after the step, as a signed deviation from the value before it. "
            "The jump at the step counts, and so does a value that is only approached."
        ),
        absent_when="the response grows without bound",
        source="specgate's own definition",
        method="enclosed: bounded without a sampling grid; exact where it is the jump or the final value",
        read=in_time(lambda response, _: response.greatest().value),
        signed=True,
        always=True,
        inputs=COURSE,
    ),
    Measure(
        name="minimum_value",
        title="Minimum value",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "The greatest lower bound of the response after the step, as a signed deviation from the value before it. "
            "The jump at the step counts, and so does a value that is only approached."
        ),
        absent_when="the response falls without bound",
        source="specgate's own definition",
        method="enclosed: bounded without a sampling grid; exact where it is the jump or the final value",
        read=in_time(lambda response, _: response.least().value),
        signed=True,
        always=True,
        inputs=COURSE,
    ),
    Measure(
        name="value_at",
        title="Value at an instant",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition="The value at the stated time after the step, as a signed deviation from the value before it.",
        absent_when="never, for a channel that has a step response",
        source="specgate's own definition",
        method="enclosed: the response in ball arithmetic at that instant; exact where it is a polynomial there",
        read=in_time(_value_at),
        arguments=(Argument("time", "time", "time after the step", required=True),),
        signed=True,
        inputs=COURSE,
    ),
    Measure(
        name="peak_deviation",
        title="Peak deviation",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "The greatest distance of the response from the value before the step, in either direction. The measure "
            "for a disturbance that is worked off, where there is no change to take a percentage of."
        ),
        absent_when="the response grows without bound",
        source="specgate's own definition",
        method="enclosed: the larger of the two extremes in magnitude",
        read=in_time(lambda response, _: response.peak_deviation().value),
        always=True,
        inputs=COURSE,
    ),
)
