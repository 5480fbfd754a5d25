"""Settling time of a single lag: 4 T into 2 %, 3 T into 5 %, 4.6 T into 1 % of the change; -ln(band) T in general.

T is the lag's time constant. The three round numbers stand for ln 50 = 3.912, ln 20 = 2.996 and ln 100 = 4.605, so
that the first two promise a little more time than is needed and the third a thousandth part less. The formula holds
for one pole and nothing else: a zero or a second pole changes the answer without limit.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import NO_ZEROS, ONE_POLE, SETTLES, percent, relative_band, words
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_ROUND = {fmpq(1, 50): fmpq(4), fmpq(1, 20): fmpq(3), fmpq(1, 100): fmpq(23, 5)}
_ACCURACY = {
    fmpq(1, 50): Accuracy(fmpq(2248, 100000), fmpq(2249, 100000), "+2.25 %: 4 stands for ln 50"),
    fmpq(1, 20): Accuracy(fmpq(142, 100000), fmpq(143, 100000), "+0.14 %: 3 stands for ln 20"),
    fmpq(1, 100): Accuracy(fmpq(-113, 100000), fmpq(-112, 100000), "-0.11 %: 4.6 stands for ln 100"),
}
_EXACT = Accuracy(fmpq(0), fmpq(0), "exact")


def _settling(features: Features, arguments: Arguments) -> Answer:
    band, pole = relative_band(arguments), features.slowest
    if pole is None or pole.oscillates:
        return Answer.nothing("there is no single real pole to take a time constant from")
    if not features.stable:
        return Answer.nothing("the pole does not decay")
    if band is None or not 0 < band < 1:
        return Answer.nothing("the formula needs a band in per cent of the change")
    constant = _ROUND.get(band)
    if constant is not None and pole.decay.exact is not None:
        return Answer.of_exact(constant / pole.decay.exact)
    return combined(lambda decay: (-arb(band).log() if constant is None else constant) / decay, pole.decay)


def _relative(_: Features, arguments: Arguments, __: fmpq | None) -> Found:
    band = relative_band(arguments)
    if band is None:
        return words("a distance in the signal's unit", False)
    return words(f"{percent(band)} of the change", 0 < band < 1)


def _accuracy(_: Features, arguments: Arguments) -> Accuracy | None:
    band = relative_band(arguments)
    return None if band is None else _ACCURACY.get(band, _EXACT)


ROW = Approximation(
    name="first_order_settling",
    title="Settling time of a single lag",
    estimates=("settling_time",),
    formula="4 T (2 %), 3 T (5 %), 4.6 T (1 %), else -ln(band) T",
    source="common practice",
    conditions=(
        SETTLES,
        ONE_POLE,
        NO_ZEROS,
        Condition(
            key="band", name="settling band", source="derived", required="in per cent of the change", find=_relative
        ),
    ),
    evaluate=_settling,
    accuracy=_accuracy,
    text=__doc__,
)
