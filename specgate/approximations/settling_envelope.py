"""Settling time of a pair from its envelope: -ln(band sqrt(1 - zeta^2))/sigma, for any band in per cent of the change.

The oscillation of the pair alone, e^(-sigma t)/sqrt(1 - zeta^2) times a cosine, never leaves its envelope, so that the
formula never promises too short a time for it: a proved upper bound, where 4/sigma is none. It is too long by up to
56 % (band of 2 %; 49.6 % at 1 %, 68.3 % at 5 %), most so where a peak of the response just stays inside the band, and
grows without limit as zeta goes to 1.

Where other poles or zeros are dropped it is an estimate like any other, and may be too short: -16.9 to +69 % with one
at the nearest place allowed, -16.9 to +86 % with several (2 %; 1 %: -14.7 to +60 and +73 %; 5 %: -20.9 to +88.5 and
+115 %).
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import at_most, narrow_band_condition, relative_band, words
from specgate.approximations.crowding import Ranges, in_decay_rates
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_WIDEST = fmpq(1, 20)
_ACCURACY: dict[fmpq, Ranges] = {
    fmpq(1, 100): ((0, 496), (-147, 600), (-147, 730)),
    fmpq(1, 50): ((0, 560), (-169, 690), (-169, 860)),
    _WIDEST: ((0, 683), (-209, 885), (-209, 1150)),
}
"""Thousandths, for bands up to so much: pair alone; crowded by at most 0.2; by at most 0.4.

The lower ends follow from the premise: an amplitude of at most 2.2 times that of the pair alone, ln(2.2) later."""


def _settling(features: Features, arguments: Arguments) -> Answer:
    band, pair = relative_band(arguments), features.pair
    if pair is None:
        return Answer.nothing("there is no complex pair of poles")
    if not features.stable:
        return Answer.nothing("the response does not settle")
    if band is None or not 0 < band < 1:
        return Answer.nothing("the formula needs a band in per cent of the change")
    damping = features.damping
    assert damping is not None
    return combined(lambda zeta, sigma: -(band * (1 - zeta * zeta).sqrt()).log() / sigma, damping, pair.decay)


def _damping(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    damping = features.damping
    if damping is None or threshold is None:
        return words("no complex pair", False)
    return at_most(damping, threshold)


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    band = relative_band(arguments)
    ranges = next((stated for widest, stated in _ACCURACY.items() if band is not None and band <= widest), None)
    return None if ranges is None else in_decay_rates(features, ranges)


ROW = Approximation(
    name="settling_envelope",
    title="Settling time from the envelope of the dominant pair",
    estimates=("settling_time",),
    formula="-ln(band sqrt(1 - zeta^2))/sigma",
    source="derived",
    conditions=(
        narrow_band_condition(_WIDEST),
        Condition(
            key="damping",
            name="damping ratio of the pair",
            source="derived",
            required="<= {threshold}",
            find=_damping,
            threshold=fmpq(99, 100),
            tighter="smaller",
        ),
    ),
    evaluate=_settling,
    accuracy=_accuracy,
    text=__doc__,
    premises=("dominant_pair",),
)
