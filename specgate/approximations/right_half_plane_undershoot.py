"""Least undershoot that a real zero right of the axis forces: (1 - band)/(e^(z ts) - 1), in parts of the change.

z is the zero's distance from the axis and ts the settling time, here that of this very loop into 2 % of its change:
whatever the controller, a stable loop with such a zero that settles within ts goes the wrong way by at least so much.
Proof: the transform of the response vanishes at z, so that the integral of y(t) e^(-z t) is zero; y is at least minus
the undershoot before ts, and at least 1 - band after it.

It is a lower bound and often far below the truth (a pair of damping ratio 0.7 with a zero at its natural frequency:
25 % of undershoot, bound 0.1 %). So it can show that a promise is impossible, and never that a limit from above is met:
as the basis of an `at_most` claim it is always out of range.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import SETTLES, words
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN, combined, smallest
from specgate.measures.measure import Arguments
from specgate.measures.reading import change
from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.terms.verdicts import Trilean

_BAND = fmpq(1, 50)
_MIDDLETON = "R. H. Middleton, Trade-offs in linear control system design, Automatica 27(2), 1991, 281-292"
_NO_ZERO = "there is no real zero right of the axis"


def _zero(features: Features) -> Answer | None:
    """Return the smallest distance of a real zero right of the axis, 1/s: it forces the most."""
    distances = [zero.distance for zero in features.zeros if not zero.oscillates and zero.decay.enclose(SHOWN) < 0]
    return smallest(distances) if distances else None


def _bound(features: Features, arguments: Arguments) -> Answer:
    zero, response = _zero(features), features.subject.response
    if zero is None:
        return Answer.nothing(_NO_ZERO)
    if not features.stable or not isinstance(response, StepResponse):
        return Answer.nothing("the response does not settle")
    final = change(response)
    if isinstance(final, Answer) or final == 0:
        return Answer.nothing("the response returns to where it was")
    settled = response.settling(_BAND * abs(final))
    if settled.absent is not None:
        return settled
    unit = abs(final) if arguments.absolute else fmpq(1)
    return combined(lambda z, time: _least(z * time) * unit, zero, settled)


def _least(exponent: arb) -> arb:
    return (1 - arb(_BAND)) / exponent.expm1()


def _real_zero(features: Features, _: Arguments, __: fmpq | None) -> Found:
    zero = features.once(_zero)
    return words("none", False) if zero is None else Found(zero.enclose(SHOWN), Trilean.YES)


ROW = Approximation(
    name="right_half_plane_undershoot",
    title="Least undershoot that a zero right of the axis forces",
    estimates=("undershoot",),
    formula="at least (1 - band)/(e^(z ts) - 1), ts the settling time into 2 %",
    source=_MIDDLETON,
    conditions=(
        SETTLES,
        Condition(
            key="real_zero",
            name="a real zero right of the axis",
            source=_MIDDLETON,
            required="at least one",
            find=_real_zero,
        ),
    ),
    evaluate=_bound,
    accuracy=lambda _, __: Accuracy(
        fmpq(-1), fmpq(0), "a lower bound: the truth is never below it, and may be far above"
    ),
    text=__doc__,
    always_safe="under",
)
