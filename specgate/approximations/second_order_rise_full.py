"""Time of a complex pair from the step to its first arrival at the final value: (pi - arccos zeta)/wd.

The rise time from 0 % to 100 % of the change: which percentages it counts between is part of the formula, and the
usual rise time from 10 % to 90 % is less than half as long at zeta = 0.9. Exact for a pair and nothing else. A
response that does not overshoot never arrives at its final value, and has no such time.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.conditions import ALONE, counted_between
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer


def _rise(features: Features, _: Arguments) -> Answer:
    damping, frequency = features.damping, features.natural_frequency
    if damping is None or frequency is None:
        return Answer.nothing("there is no complex pair of poles")
    if not features.stable:
        return Answer.nothing("the response does not settle")
    return combined(_arrival, damping, frequency)


def _arrival(zeta: arb, frequency: arb) -> arb:
    return (arb.pi() - zeta.acos()) / (frequency * (1 - zeta * zeta).sqrt())


ROW = Approximation(
    name="second_order_rise_full",
    title="Time of a pair to its first arrival at the final value",
    estimates=("rise_time",),
    formula="(pi - arccos zeta)/wd",
    source="exact for the pair",
    conditions=(counted_between(fmpq(0), fmpq(1)), ALONE),
    evaluate=_rise,
    accuracy=lambda _, __: Accuracy(fmpq(0), fmpq(0), "exact"),
    text=__doc__,
    premises=("dominant_pair",),
    alternatives=("second_order_rise",),
)
