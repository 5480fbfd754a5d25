"""How far a step response goes past its final value, and how far the wrong way."""

from __future__ import annotations

from flint import fmpq

from specgate.measures.inputs import ENDING
from specgate.measures.measure import Arguments, Measure, UnitRule
from specgate.measures.reading import affine, change, in_time, no_change, positive_part
from specgate.response.answers import Answer
from specgate.response.questions import TimeResponse

_NO_DIRECTION = ("there is no direction of change to overshoot in", "ask for peak_deviation, or limit both extremes")


def _excursion(value: Answer, direction: int, floor: fmpq, unit: fmpq) -> Answer:
    """Return max(0, direction * value - floor) / unit."""
    return positive_part(affine(value, direction / unit, -floor / unit))


def _overshoot(response: TimeResponse, arguments: Arguments) -> Answer:
    final = change(response)
    if isinstance(final, Answer):
        return final
    if final == 0:
        return no_change(*_NO_DIRECTION)
    direction, size = (1, final) if final > 0 else (-1, -final)
    extreme = response.greatest() if direction > 0 else response.least()
    return _excursion(extreme.value, direction, size, fmpq(1) if arguments.absolute else size)


def _undershoot(response: TimeResponse, arguments: Arguments) -> Answer:
    final = change(response)
    if isinstance(final, Answer):
        return final
    if final == 0:
        return no_change(*_NO_DIRECTION)
    direction, size = (1, final) if final > 0 else (-1, -final)
    extreme = response.least() if direction > 0 else response.greatest()
    return _excursion(extreme.value, -direction, fmpq(0), fmpq(1) if arguments.absolute else size)


ROWS = (
    Measure(
        name="overshoot",
        title="Overshoot",
        subjects=("response",),
        unit=UnitRule.CHANGE,
        definition=(
            "The greatest distance by which the response goes beyond its final value in the direction of the change; "
            "zero if it never does. In per cent of the change from the steady value before the step to the final "
            "value, or in the signal's unit. A jump at the step counts."
        ),
        absent_when="the response does not settle, or its change is zero (there is no direction)",
        source="IEC 60050-351:2013, 351-45-38 (overshoot); per cent of the change and the jump fixed by specgate",
        method="enclosed: from the proved extreme; exactly zero only where it is proved never to be passed",
        read=in_time(_overshoot),
        always=True,
        inputs=ENDING,
    ),
    Measure(
        name="undershoot",
        title="Undershoot",
        subjects=("response",),
        unit=UnitRule.CHANGE,
        definition=(
            "The greatest distance by which the response goes the wrong way: beyond the value before the step, against "
            "the direction of the change; zero if it never does. In per cent of the change, or in the signal's unit."
        ),
        absent_when="the response does not settle, or its change is zero (there is no direction)",
        source="specgate's own definition; IEC 60050-351 has no term for it",
        method="enclosed: from the proved extreme; exactly zero only where the value before the step is never crossed",
        read=in_time(_undershoot),
        always=True,
        inputs=ENDING,
    ),
)
