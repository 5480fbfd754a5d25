"""Upper bound of the settling time of real poles: [ln(1/band) + sum of ln(p/(p - p1))]/p1 over the other poles p.

p1 is the decay rate of the slowest pole; without zeros the deviation from the final value is a sum of decaying
exponentials that never exceeds the slowest mode alone. So the formula never promises too short a time: read the
response as the distribution of a sum of exponential waiting times, and the deviation as the chance P(X1 + S > t) that
it lasts longer than t; given S it is min(1, e^(-p1 (t - S))) <= e^(-p1 (t - S)), whose mean is the slowest mode with
the amplitude that the formula takes. It is too long by little: below 0.2 % for two poles from ratio 2 on.
"""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import (
    NO_ZEROS,
    SETTLES,
    at_least,
    count,
    narrow_band_condition,
    relative_band,
    words,
)
from specgate.approximations.features import Features
from specgate.approximations.figures import combined, quotient, smallest
from specgate.approximations.real_tail import REAL_POLES, faster, tail_growth
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_MOST_POLES = fmpq(8)
_NARROW, _WIDEST = fmpq(1, 50), fmpq(1, 20)
_EXCESS = {
    _NARROW: (0, 46, 90, 128, 161, 190, 216, 239),
    _WIDEST: (0, 75, 136, 184, 224, 258, 287, 313),
}
"""Largest excess in thousandths, by the number of poles, 1 to 8: all others at 1.25 times the slowest."""


def _settling(features: Features, arguments: Arguments) -> Answer:
    band, pole = relative_band(arguments), features.slowest
    growth = tail_growth(features)
    if pole is None or growth is None:
        return Answer.nothing("there is no simple slowest real pole that decays")
    if band is None or not 0 < band < 1:
        return Answer.nothing("the formula needs a band in per cent of the change")
    return combined(lambda tail, decay: (tail - arb(band).log()) / decay, growth, pole.decay)


def _ratio(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    slowest, others = features.slowest, list(faster(features))
    if slowest is None or threshold is None or not features.stable:
        return words("no slowest pole that decays", False)
    if not others:
        return words("no other pole", True)
    return at_least(quotient(smallest([pole.decay for pole in others]), slowest.decay), threshold)


def _few(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return count(len(features.poles), threshold is not None and 0 < len(features.poles) <= threshold)


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    band, poles = relative_band(arguments), len(features.poles)
    widest = next((limit for limit in _EXCESS if band is not None and band <= limit), None)
    if widest is None or not 1 <= poles <= _MOST_POLES:
        return None
    excess = fmpq(_EXCESS[widest][poles - 1], 1000)
    words_for_it = f"{poles} poles, band up to {100 * int(widest.p) / int(widest.q):g} %"
    return Accuracy(
        fmpq(0), excess, f"0 to +{100 * int(excess.p) / int(excess.q):g} % ({words_for_it}); never too short"
    )


ROW = Approximation(
    name="real_poles_settling",
    title="Upper bound of the settling time of real poles",
    estimates=("settling_time",),
    formula="[ln(1/band) + sum of ln(p/(p - p1))]/p1",
    source="derived",
    conditions=(
        SETTLES,
        REAL_POLES,
        NO_ZEROS,
        narrow_band_condition(_WIDEST),
        Condition(
            key="ratio",
            name="other poles at least {threshold} times the slowest",
            source="derived",
            required=">= {threshold}",
            find=_ratio,
            threshold=fmpq(5, 4),
        ),
        Condition(
            key="count",
            name="number of poles",
            source="derived",
            required="at most {threshold} (the accuracy was shown up to there)",
            find=_few,
            threshold=_MOST_POLES,
            tighter="smaller",
        ),
    ),
    evaluate=_settling,
    accuracy=_accuracy,
    text=__doc__,
    always_safe="over",
)
