"""Steady-state error of unity feedback from the position constant of the opened loop: size/|1 + Kp| for a step.

Kp is L at s = 0 at a break that the loop declares; with an integrator in L it is infinite and the error zero. Exact
where the response is that of unity negative feedback around this break, with the error taken where the reference
comes in: error/reference = 1/(1 + L), whatever blocks L is made of. A demand that is filtered on its way, a sensor with
a gain, or a disturbance that enters elsewhere is another loop: an integrator in the plant does not cancel a load step
that enters before it, although L has the type that "no error" is read from.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import SETTLES, words
from specgate.approximations.features import Features
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.systems.error_constants import loop_type, position_constant
from specgate.systems.transfer import TransferFunction

_SOURCE = "K. Ogata, Modern Control Engineering, chapter 5; N. S. Nise, Control Systems Engineering, chapter 7"
_NO_BREAK = "no break is declared in this loop"


def _around(features: Features) -> str | None:
    """Return the first declared break around which the response is one of unity feedback."""
    return next((name for name, opened in features.open_loops.items() if _unity(features, opened)), None)


def _unity(features: Features, opened: TransferFunction) -> bool:
    """Whether error over reference is 1/(1 + L), exactly."""
    error = features.subject.error
    if not isinstance(error, StepResponse):
        return False
    closed = opened.denominator + opened.numerator
    return bool(error.numerator * closed == error.denominator * opened.denominator)


def _error(features: Features, _: Arguments) -> Answer:
    name = features.once(_around) or next(iter(features.open_loops), None)
    if name is None:
        return Answer.nothing(f"{_NO_BREAK}: declare the point at which it is opened")
    opened = features.open_loops[name]
    if loop_type(opened) > 0:
        return Answer.of_exact(0)
    constant = position_constant(opened)
    if constant is None or constant == -1:
        return Answer.nothing("1 + Kp is zero")
    return Answer.of_exact(abs(features.subject.size / (1 + constant)))


def _found(features: Features, _: Arguments, __: fmpq | None) -> Found:
    if not features.open_loops:
        return words(_NO_BREAK, False)
    name = features.once(_around)
    return words("around none of its breaks" if name is None else f"around `{name}`", name is not None)


ROW = Approximation(
    name="static_error_constants",
    title="Steady-state error from the position constant",
    estimates=("steady_state_error",),
    formula="size/|1 + Kp| for a step",
    source=_SOURCE,
    conditions=(
        SETTLES,
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
)
