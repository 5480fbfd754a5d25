"""Integrators and differentiators of a response: poles and zeros at the origin, counted exactly."""

from __future__ import annotations

from specgate.measures.inputs import SINGLE
from specgate.measures.measure import Arguments, Measure, UnitRule
from specgate.measures.reading import missing
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer


def _poles(subject: ResponseSubject, _: Arguments) -> Answer:
    if isinstance(subject.channel, Absent):
        return missing(subject.channel)
    return Answer.of_exact(subject.channel.poles_at_origin)


def _zeros(subject: ResponseSubject, _: Arguments) -> Answer:
    if isinstance(subject.channel, Absent):
        return missing(subject.channel)
    if not subject.channel.numerator:
        return Answer.nothing("the signal does not react to this input at all")
    return Answer.of_exact(subject.channel.zeros_at_origin)


_METHOD = "exact: powers of s in the channel once common factors are cancelled in rational arithmetic"

ROWS = (
    Measure(
        name="poles_at_origin",
        title="Poles at the origin",
        subjects=("response",),
        unit=UnitRule.COUNT,
        definition=(
            "Number of integrators of the response: poles at s = 0 of the channel from input to signal, after exact "
            "cancellation. With one, a step makes the signal run away at a constant rate."
        ),
        absent_when="never",
        source="integral element, IEC 60050-351:2013, 351-50-08, counted in the channel",
        method=_METHOD,
        read=_poles,
        always=True,
        inputs=SINGLE,
    ),
    Measure(
        name="zeros_at_origin",
        title="Zeros at the origin",
        subjects=("response",),
        unit=UnitRule.COUNT,
        definition=(
            "Number of differentiators of the response: zeros at s = 0 of the channel from input to signal, after "
            "exact cancellation. One is enough for a step to leave no lasting deviation."
        ),
        absent_when="the signal does not react to the input",
        source="derivative element, IEC 60050-351:2013, 351-50-13, counted in the channel",
        method=_METHOD,
        read=_zeros,
        always=True,
        inputs=SINGLE,
    ),
)
