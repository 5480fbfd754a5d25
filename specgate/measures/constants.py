"""Type and error constants of a loop opened at a break, exact."""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq

from specgate.measures.measure import Arguments, Measure, Reader, UnitRule
from specgate.measures.subjects import BreakSubject
from specgate.response.answers import Answer
from specgate.systems import error_constants


def _type(subject: BreakSubject, _: Arguments) -> Answer:
    return Answer.of_exact(error_constants.loop_type(subject.open_loop))


def _constant(of: Callable[[error_constants.Opened], fmpq | None], power: int) -> Reader:
    """Return the reader of lim s^power L(s) at s = 0; without limit where the loop has more integrators."""

    def read(subject: BreakSubject, _: Arguments) -> Answer:
        value = of(subject.open_loop)
        if value is None:
            return _without_limit(subject.open_loop, power)
        return Answer.of_exact(value)

    return read


_MOST = ("only without any", "with one at most", "with two at most")


def _without_limit(open_loop: error_constants.Opened, power: int) -> Answer:
    count = error_constants.loop_type(open_loop)
    integrators = "an integrator" if count == 1 else f"{count} integrators"
    reason = f"the open loop has {integrators}, and the constant is finite {_MOST[power]}"
    if error_constants.sign_at_origin(open_loop) < 0:
        return Answer.nothing(f"{reason}: with this sign of the gain it falls without limit")
    return Answer.nothing(f"{reason}: it grows without limit", infinite=True)


_METHOD = "exact: rational arithmetic at s = 0 (of a sampled loop z = 1) on the open loop, reduced"
_SOURCE = "common control practice (error constants); says something of the error only where the closed loop is stable"


def _row(name: str, title: str, unit: UnitRule, definition: str, read: Reader) -> Measure:
    return Measure(
        name=name,
        title=title,
        subjects=("break",),
        unit=unit,
        definition=definition,
        absent_when="the open loop has more integrators than the constant divides by: it is infinite",
        source=_SOURCE,
        method=_METHOD,
        read=read,
        signed=True,
        always=True,
    )


ROWS = (
    Measure(
        name="loop_type",
        title="Type of the loop",
        subjects=("break",),
        unit=UnitRule.COUNT,
        definition=(
            "Number of integrators of the open loop, after exact cancellation: poles minus zeros at s = 0. Where the "
            "integrator sits in the loop matters for a disturbance; the type does not tell."
        ),
        absent_when="never",
        source="common control practice (system type)",
        method=_METHOD,
        read=_type,
        signed=True,
        always=True,
    ),
    _row(
        "position_constant",
        "Position constant",
        UnitRule.RATIO,
        "Limit of L(s) at s = 0. With unity feedback a step leaves the error 1/(1 + constant) of its size.",
        _constant(error_constants.position_constant, 0),
    ),
    _row(
        "velocity_constant",
        "Velocity constant",
        UnitRule.PER_SECOND,
        "Limit of s L(s) at s = 0. With unity feedback a ramp leaves the error slope/constant.",
        _constant(error_constants.velocity_constant, 1),
    ),
    _row(
        "acceleration_constant",
        "Acceleration constant",
        UnitRule.PER_SECOND_SQUARED,
        "Limit of s^2 L(s) at s = 0. With unity feedback a parabola leaves the error curvature/constant.",
        _constant(error_constants.acceleration_constant, 2),
    ),
)
