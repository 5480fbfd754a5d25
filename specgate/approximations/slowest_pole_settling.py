"""Settling time of real poles from the slowest alone: 4/p1 into 2 %, 3/p1 into 5 % of the change.

p1 is the decay rate of the slowest pole. Each further pole p makes the tail larger by p/(p - p1) and so adds
ln(p/(p - p1))/p1 to the settling time; a zero at distance z to the left takes ln(z/(z - p1))/p1 off, one to the right
adds. It is their sum that counts, not the nearest one alone: four poles five times faster, each harmless, together
make 4/p1 a sixth too short. The formula is unsafe (too short) as soon as the sum exceeds 0.088 for 2 % and 0.0043 for
5 %, that is for one further pole nearer than 11.9 and 235 times p1; real_poles_settling takes the sum into account
and is a proved upper bound.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import SETTLES, at_least, band_condition, between, relative_band, words
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient, smallest
from specgate.approximations.real_tail import REAL_POLES, faster, tail_growth
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_CONSTANT = {fmpq(1, 50): fmpq(4), fmpq(1, 20): fmpq(3)}
_SUM = fmpq(3, 10)
_TWO_PERCENT, _FIVE_PERCENT = _CONSTANT


def _settling(features: Features, arguments: Arguments) -> Answer:
    band, pole = relative_band(arguments), features.slowest
    constant = None if band is None else _CONSTANT.get(band)
    if constant is None:
        return Answer.nothing("the formula has numbers for bands of 2 % and 5 % of the change only")
    if pole is None or pole.oscillates or not features.stable:
        return Answer.nothing("there is no slowest real pole that decays")
    return quotient(Answer.of_exact(constant), pole.decay)


def _separation(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    slowest = features.slowest
    if slowest is None or threshold is None or not features.stable:
        return words("no slowest pole that decays", False)
    distances = [pole.decay for pole in faster(features)] + [zero.distance for zero in features.zeros]
    if not distances:
        return words("no other pole or zero", True)
    return at_least(quotient(smallest(distances), slowest.decay), threshold)


def _sum(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    growth = tail_growth(features)
    if growth is None or threshold is None:
        return words("no simple slowest pole", False)
    return between(growth, -threshold, threshold)


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    band = relative_band(arguments)
    if band == _TWO_PERCENT:
        if features.zeros:
            return Accuracy(fmpq(-51, 1000), fmpq(108, 1000), "2 %, with zeros: -5.1 to +10.8 %")
        return Accuracy(fmpq(-51, 1000), fmpq(23, 1000), "2 %, poles only: -5.1 to +2.3 %")
    if band == _FIVE_PERCENT:
        if features.zeros:
            return Accuracy(fmpq(-90, 1000), fmpq(113, 1000), "5 %, with zeros: -9.0 to +11.3 %")
        return Accuracy(fmpq(-90, 1000), fmpq(2, 1000), "5 %, poles only: -9.0 to +0.2 %")
    return None


ROW = Approximation(
    name="slowest_pole_settling",
    title="Settling time from the slowest real pole",
    estimates=("settling_time",),
    formula="4/p1 (2 %), 3/p1 (5 %)",
    source="common practice",
    conditions=(
        SETTLES,
        REAL_POLES,
        band_condition(_CONSTANT, "common practice"),
        Condition(
            key="separation",
            name="other poles and zeros at least {threshold} times faster",
            source="common practice",
            required=">= {threshold}",
            find=_separation,
            threshold=fmpq(5),
        ),
        Condition(
            key="tail_growth",
            name="sum of ln(p/(p - p1)) over the other poles, less that of the zeros",
            source="derived",
            required="within +-{threshold}",
            find=_sum,
            threshold=_SUM,
            tighter="smaller",
        ),
    ),
    evaluate=_settling,
    accuracy=_accuracy,
    text=__doc__,
    alternatives=("real_poles_settling",),
)
