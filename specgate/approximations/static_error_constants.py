"""Steady-state error of unity feedback from the error constants of the opened loop.

For a step of the reference it is size/|1 + Kp|, for a ramp slope/|Kv|, for a parabola curvature/|Ka|, with Kp, Kv and
Ka the limits of L, s L and s^2 L at s = 0 at a break that the loop declares. An integrator in L makes Kp infinite and
the error of a step zero, two do so for a ramp, three for a parabola; with one too few the constant is zero and the
error grows without bound. Exact where the response is that of unity negative feedback around this break, with the
error taken where the reference comes in: error/reference = 1/(1 + L), whatever blocks L is made of. A demand that is
filtered on its way, a sensor with a gain, or a disturbance that enters elsewhere is another loop: an integrator in the
plant does not cancel a load step that enters before it, although L has the type that "no error" is read from. A dead
time in the loop changes none of the constants.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import SETTLES, words
from specgate.approximations.features import Features
from specgate.approximations.late import LateResponse
from specgate.approximations.opened import OpenedLoop
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.error_constants import (
    Opened,
    acceleration_constant,
    loop_type,
    position_constant,
    velocity_constant,
)
from specgate.systems.transfer import TransferFunction
from specgate.terms.verdicts import Trilean

_SOURCE = "K. Ogata, Modern Control Engineering, chapter 5; N. S. Nise, Control Systems Engineering, chapter 7"
_NO_BREAK = "no break is declared in this loop"

Seen = Features | LateResponse

_BY_INPUT: Mapping[str, tuple[int, str, Callable[[Opened], fmpq | None]]] = {
    "step": (0, "size", lambda opened: _plus_one(position_constant(opened))),
    "ramp": (1, "slope", velocity_constant),
    "parabola": (2, "curvature", acceleration_constant),
}
"""Integrators that leave an error, what describes the input, and what that is divided by (None: infinite)."""


def _plus_one(constant: fmpq | None) -> fmpq | None:
    return None if constant is None else 1 + constant


def _at(opened: OpenedLoop) -> Opened | None:
    """Return L at a break for slow signals; None where a sampled block is in the loop."""
    found = opened.subject.open_loop
    return found if isinstance(found, TransferFunction | DelayedTransfer) else None


def _around(seen: Seen) -> OpenedLoop | None:
    """Return the break around which the error is that of unity feedback."""
    measured = isinstance(seen, Features) or seen.reference == "input"
    return seen.around if measured else None


def _looked_at(seen: Seen) -> Opened | None:
    """Return L around which the error is that of unity feedback, else the first one there is."""
    around = _around(seen)
    every = (_at(one) for one in ((around,) if around is not None else tuple(seen.breaks.values())))
    return next((one for one in every if one is not None), None)


def _error(seen: Seen, _: Arguments) -> Answer:
    opened, subject = _looked_at(seen), seen.subject
    if opened is None:
        return Answer.nothing(f"{_NO_BREAK}: declare the point at which it is opened")
    if subject.kind not in _BY_INPUT:
        return Answer.nothing("error constants are for steps, ramps and parabolas")
    integrators, quantity, divisor_of = _BY_INPUT[subject.kind]
    if loop_type(opened) > integrators:
        return Answer.of_exact(0)
    divisor = divisor_of(opened)
    if not divisor:
        return Answer.nothing("1 + Kp is zero" if integrators == 0 else "L has too few integrators: the error grows")
    driven = subject.size if subject.kind == "step" else subject.inputs[0].quantities[quantity]
    return Answer.of_exact(abs(driven / divisor))


def _settles(seen: Seen, arguments: Arguments, threshold: fmpq | None) -> Found:
    if isinstance(seen, Features):
        return SETTLES.find(seen, arguments, threshold)
    if seen.subject.void is not None:
        return words(seen.subject.void.reason, False)
    around = seen.around
    if around is None or around.stable is None:
        return Found("not told of this loop", Trilean.UNKNOWN)
    return words("all are" if around.stable else "at least one is not", around.stable)


def _found(seen: Seen, _: Arguments, __: fmpq | None) -> Found:
    if all(_at(one) is None for one in seen.breaks.values()):
        return words(_NO_BREAK, False)
    around = _around(seen)
    return words("around none of its breaks" if around is None else f"around `{around.name}`", around is not None)


ROW = Approximation(
    name="static_error_constants",
    title="Steady-state error from error constants",
    estimates=("steady_state_error",),
    formula="size/|1 + Kp| for a step, slope/|Kv| for a ramp, curvature/|Ka| for a parabola",
    source=_SOURCE,
    conditions=(
        replace(SETTLES, find=_settles),
        Condition(
            key="unity_feedback",
            name="unity negative feedback, the error taken where the reference comes in",
            source=_SOURCE,
            required="error/reference = 1/(1 + L) at a declared break",
            find=_found,
        ),
    ),
    evaluate=_error,
    accuracy=lambda _, __: Accuracy(fmpq(0), fmpq(0), "exact"),
    text=__doc__,
    alternatives=("final_value_theorem",),
    inputs=("ramp", "parabola"),
    late=True,
)
