"""The zeros of a response are dropped, its poles kept.

Tolerable where the zeros are far from the dominant pair: five decay rates away for the settling time, five natural
frequencies for overshoot, peak time and rise time. A zero to the left quickens the response and raises the overshoot,
so that dropping it is unsafe there: three decay rates away it adds 27 points of overshoot to a pair of damping ratio
0.3, five away 10 points. A zero at the origin can never be dropped: the response then returns to where it was. Zeros
beside other complex poles may be there to quieten them, and are not dropped for the shape of a response.

The formula's value is that of the same response without the zeros, computed and proved. Where the response is a pair
and one zero, no approximation is needed: keep the zero and use the computed value.
"""

from __future__ import annotations

from flint import fmpq, fmpq_poly

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import at_least, between, relative_band, words
from specgate.approximations.crowding import Ranges, in_decay_rates, in_distances
from specgate.approximations.dropped import zeros_amplitude
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient, smallest
from specgate.measures.measure import Arguments
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.terms.verdicts import Proof

_SETTLING = ("settling_time",)
_SHAPE = ("overshoot", "peak_time", "rise_time")


def _without_zeros(features: Features, arguments: Arguments) -> Answer:
    kept = _reduced(features, arguments)
    if isinstance(kept, Absent):
        return Answer(Proof.EXACT, absent=kept)
    read = MEASURES[_measure(arguments)].read
    assert read is not None
    answer: Answer = read(kept.subject, arguments)
    return answer


def _reduced(features: Features, _: Arguments) -> Features | Absent:
    """Return the response without its zeros."""
    return features.once(_without)


def _without(features: Features) -> Features | Absent:
    constant = fmpq_poly([features.channel.numerator[0]])
    if not constant:
        return Absent("a zero lies at the origin: without it there is another response")
    return features.of(constant, features.channel.denominator)


def _measure(arguments: Arguments) -> str:
    return arguments.measure or _SETTLING[0]


def _zeros_exist(features: Features, _: Arguments, __: fmpq | None) -> Found:
    number = len(features.zeros)
    return words(f"{number}" if number else "none: there is nothing to drop", number > 0)


def _in_units(features: Features, yardstick: Answer | None, threshold: fmpq | None) -> Found:
    if yardstick is None or threshold is None or not features.zeros or not features.stable:
        return words("no zero, or no complex pair that decays", False)
    return at_least(quotient(smallest([zero.distance for zero in features.zeros]), yardstick), threshold)


def _others_real(features: Features, _: Arguments, __: fmpq | None) -> Found:
    oscillating = sum(pole.oscillates for pole in features.others)
    return words(f"{oscillating} are not" if oscillating else "all are", oscillating == 0)


def _by_decay_rate(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _in_units(features, features.sigma, threshold)


def _amplitude(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    value = zeros_amplitude(features)
    if value is None or threshold is None:
        return words("no zero, or no complex pair that decays", False)
    return between(value, 1 / threshold, threshold)


def _by_frequency(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _in_units(features, features.natural_frequency, threshold)


_SETTLING_RANGES: Ranges = ((0, 0), (-412, 668), (-456, 862))
_OVERSHOOT_RANGES: Ranges = ((0, 0), (-27, 11), (-52, 43))
_PEAK_RANGES: Ranges = ((0, 0), (-61, 70), (-114, 149))
_RISE_RANGES: Ranges = ((0, 0), (-20, 38), (-82, 75))
_OF_SHAPE = {"overshoot": _OVERSHOOT_RANGES, "peak_time": _PEAK_RANGES, "rise_time": _RISE_RANGES}


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    measure = _measure(arguments)
    if measure in _OF_SHAPE:
        ordinary = (arguments.lower, arguments.upper) == (fmpq(1, 10), fmpq(9, 10))
        return in_distances(features, _OF_SHAPE[measure]) if ordinary or measure != "rise_time" else None
    band = relative_band(arguments)
    shown = band is not None and fmpq(1, 100) <= band <= fmpq(1, 20)
    return in_decay_rates(features, _SETTLING_RANGES) if shown else None


ROW = Approximation(
    name="distant_zero",
    title="Zeros far from the dominant pair are dropped",
    estimates=(*_SETTLING, *_SHAPE),
    formula="the same response with a constant numerator",
    source="common practice; the yardstick for overshoot, peak and rise time: derived",
    conditions=(
        Condition(
            key="zeros", name="there is a zero to drop", source="derived", required="at least one", find=_zeros_exist
        ),
        Condition(
            key="zero_separation",
            name="zeros at least {threshold} decay rates of the pair from the origin",
            source="common practice",
            required=">= {threshold}",
            find=_by_decay_rate,
            threshold=fmpq(5),
            concerns=_SETTLING,
        ),
        Condition(
            key="zeros_amplitude",
            name="change of the amplitude of the pair's oscillation by the zeros",
            source="derived",
            required="by a factor of at most {threshold} more or less",
            find=_amplitude,
            threshold=fmpq(11, 5),
            tighter="smaller",
            concerns=_SETTLING,
        ),
        Condition(
            key="zero_distance",
            name="zeros at least {threshold} natural frequencies of the pair from the origin",
            source="derived",
            required=">= {threshold}",
            find=_by_frequency,
            threshold=fmpq(5),
            concerns=_SHAPE,
        ),
        Condition(
            key="other_poles",
            name="poles beside the pair are real",
            source="derived",
            required="all real",
            find=_others_real,
            concerns=_SHAPE,
        ),
    ),
    evaluate=_without_zeros,
    accuracy=_accuracy,
    text=__doc__,
    premises=("dominant_pair",),
    reduce=_reduced,
)
