"""Error measures: of the reference minus the response."""

from __future__ import annotations

from collections.abc import Callable

from specgate.measures.inputs import ENDING, VANISHING
from specgate.measures.measure import Argument, Arguments, Measure, Reader, UnitRule
from specgate.measures.reading import in_time, missing, with_time
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer
from specgate.response.questions import TimeResponse


def _signed_error(subject: ResponseSubject, _: Arguments) -> Answer:
    if subject.void is not None:
        return missing(subject.void)
    if isinstance(subject.error, Absent):
        return missing(subject.error)
    return subject.error.final_value() if subject.lasting is None else Answer.of_exact(subject.lasting)


def _error(subject: ResponseSubject, arguments: Arguments) -> Answer:
    signed = _signed_error(subject, arguments)
    return signed if signed.exact is None else Answer.of_exact(abs(signed.exact))


def _integral(ask: Callable[[TimeResponse], Answer]) -> Reader:
    """Make a reader of the error from a question to its course."""

    def reader(subject: ResponseSubject, _: Arguments) -> Answer:
        if subject.void is not None:
            return missing(subject.void)
        return missing(subject.error) if isinstance(subject.error, Absent) else ask(subject.error)

    return reader


def _deviation_after(response: TimeResponse, arguments: Arguments) -> Answer:
    if arguments.time is None:
        raise ValueError("deviation_after needs the argument `time`")
    return with_time(response.deviation_after(arguments.time))


_INTEGRAL = "the error does not vanish in the end: its integral grows without bound"

ROWS = (
    Measure(
        name="steady_state_error",
        of_error=True,
        title="Steady-state error",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition=(
            "Magnitude of what is left of reference minus response once everything has settled; the signed value is "
            "printed beside it. The reference is the input of the response where both have one dimension, else the "
            "signal that the response names as `reference`."
        ),
        absent_when="the error does not settle; or no reference of the same dimension is named",
        source="IEC 60050-351:2013, control difference variable (section 351-48) in steady state",
        method="exact: value at s = 0 of the channel from input to error, after an exact stability test",
        read=_error,
        beside=_signed_error,
        always=True,
        inputs=VANISHING,
    ),
    Measure(
        name="deviation_after",
        title="Deviation after a time",
        subjects=("response",),
        unit=UnitRule.SIGNAL,
        definition="The greatest distance of the response from its final value from the stated time on, for good.",
        absent_when="the response does not settle",
        source="specgate's own definition",
        method="enclosed: the further of both extremes from that time on",
        read=in_time(_deviation_after),
        arguments=(Argument("time", "time", "time after the step from which on the distance counts", required=True),),
        inputs=ENDING,
    ),
    Measure(
        name="integral_absolute_error",
        of_error=True,
        title="Integral of the absolute error",
        subjects=("response",),
        unit=UnitRule.SIGNAL_SECOND,
        definition="Integral over all time of the magnitude of reference minus response.",
        absent_when=_INTEGRAL,
        source="common control criterion (IAE)",
        method="enclosed: lobes between proved zeros of the error",
        read=_integral(lambda error: error.absolute_integral()),
        inputs=VANISHING,
    ),
    Measure(
        name="integral_squared_error",
        of_error=True,
        title="Integral of the squared error",
        subjects=("response",),
        unit=UnitRule.SIGNAL_SQUARED_SECOND,
        definition="Integral over all time of the square of reference minus response.",
        absent_when=_INTEGRAL,
        source="common control criterion (ISE)",
        method=(
            "exact by Parseval's theorem for a step through a rational loop; else enclosed: the squares of its pieces "
            "integrated in closed form"
        ),
        read=_integral(lambda error: error.squared_integral()),
        inputs=VANISHING,
    ),
)
