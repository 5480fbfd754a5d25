"""Rise time of a single lag: 2.2 T from 10 % to 90 % of the change, ln((1 - from)/(1 - to)) T in general.

T is the lag's time constant. 2.2 stands for ln 9 = 2.1972, so that the formula promises a thousandth part more time
than is needed. It holds for one pole and nothing else: a zero makes the response start with a jump that may reach the
lower percentage at once, a second pole of the same size makes the rise half as long again.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.conditions import NO_ZEROS, ONE_POLE, SETTLES
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_USUAL = fmpq(1, 10), fmpq(9, 10)
_ROUND = fmpq(11, 5)
_ACCURACY = Accuracy(fmpq(126, 100000), fmpq(127, 100000), "+0.13 %: 2.2 stands for ln 9")
_EXACT = Accuracy(fmpq(0), fmpq(0), "exact")


def _rise(features: Features, arguments: Arguments) -> Answer:
    pole = features.slowest
    if pole is None or pole.oscillates:
        return Answer.nothing("there is no single real pole to take a time constant from")
    if not features.stable:
        return Answer.nothing("the pole does not decay")
    if arguments.upper >= 1:
        return Answer.nothing("a single lag never reaches its final value")
    if (arguments.lower, arguments.upper) == _USUAL:
        exact = pole.decay.exact
        return (
            Answer.of_exact(_ROUND / exact) if exact is not None else combined(lambda rate: _ROUND / rate, pole.decay)
        )
    left = (1 - arguments.lower) / (1 - arguments.upper)
    return combined(lambda rate: arb(left).log() / rate, pole.decay)


def _accuracy(_: Features, arguments: Arguments) -> Accuracy | None:
    return _ACCURACY if (arguments.lower, arguments.upper) == _USUAL else _EXACT


ROW = Approximation(
    name="first_order_rise",
    title="Rise time of a single lag",
    estimates=("rise_time",),
    formula="2.2 T (10 % to 90 %), else ln((1 - from)/(1 - to)) T",
    source="common practice",
    conditions=(SETTLES, ONE_POLE, NO_ZEROS),
    evaluate=_rise,
    accuracy=_accuracy,
    text=__doc__,
)
