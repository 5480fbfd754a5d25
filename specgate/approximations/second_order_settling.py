"""Settling time of a dominant pair from its real part: 4/sigma into 2 %, 3/sigma into 5 %, 4.6/sigma into 1 %.

sigma is minus the real part of the complex pair that dominates the response. The formula takes the envelope of the
pair for the pair itself and leaves out that its amplitude is 1/sqrt(1 - zeta^2). The envelope guarantees it as an upper
bound only for damping ratios up to 0.40 (2 %) and 0.092 (5 %), and never for 1 %; it is first too short at 0.4905 and
0.0948. A damped pair settles earlier than its envelope, most so where a peak of the response just stays inside the
band (zeta = 0.780 for 2 %, 0.690 for 5 %, 0.826 for 1 %): there the formula is half as long again as the truth, and
the settling time itself jumps.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import band_condition, between, relative_band, words
from specgate.approximations.crowding import in_decay_rates
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_TWO, _FIVE, _ONE = fmpq(1, 50), fmpq(1, 20), fmpq(1, 100)
_CONSTANT = {_TWO: fmpq(4), _FIVE: fmpq(3), _ONE: fmpq(23, 5)}
_LEAST_DAMPED = fmpq(1, 10)
_MOST_DAMPED = {_TWO: fmpq(9, 10), _FIVE: fmpq(4, 5), _ONE: fmpq(9, 10)}
_SOURCE = "K. Ogata, Modern Control Engineering, chapter 5; N. S. Nise, Control Systems Engineering, chapter 4"


def _settling(features: Features, arguments: Arguments) -> Answer:
    band, sigma = relative_band(arguments), features.sigma
    constant = None if band is None else _CONSTANT.get(band)
    if constant is None:
        return Answer.nothing("the formula has numbers for bands of 2 %, 5 % and 1 % of the change only")
    if sigma is None:
        return Answer.nothing("there is no complex pair of poles")
    if not features.stable:
        return Answer.nothing("the response does not settle")
    return quotient(Answer.of_exact(constant), sigma)


def _damping(features: Features, arguments: Arguments, _: fmpq | None) -> Found:
    band, damping = relative_band(arguments), features.damping
    if damping is None:
        return words("no complex pair", False)
    highest = _MOST_DAMPED[_FIVE] if band == _FIVE else _MOST_DAMPED[_TWO]
    return between(damping, _LEAST_DAMPED, highest)


_ACCURACY = {
    _TWO: ((-72, 425), (-151, 540), (-155, 672)),
    _FIVE: ((-84, 521), (-209, 696), (-215, 905)),
    _ONE: ((-97, 329), (-149, 418), (-167, 517)),
}
"""Thousandths: pair alone; other poles and zeros crowding it by at most 0.2; by at most 0.4."""


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    band = relative_band(arguments)
    ranges = None if band is None else _ACCURACY.get(band)
    return None if ranges is None else in_decay_rates(features, ranges)


ROW = Approximation(
    name="second_order_settling",
    title="Settling time from the real part of the dominant pair",
    estimates=("settling_time",),
    formula="4/sigma (2 %), 3/sigma (5 %), 4.6/sigma (1 %)",
    source=_SOURCE,
    conditions=(
        band_condition(_CONSTANT, "common practice"),
        Condition(
            key="damping",
            name="damping ratio of the pair",
            source=_SOURCE,
            required="0.1 to 0.9 (to 0.8 for a band of 5 %)",
            find=_damping,
        ),
    ),
    evaluate=_settling,
    accuracy=_accuracy,
    text=__doc__,
    premises=("dominant_pair",),
    alternatives=("settling_envelope", "dominant_pair"),
)
