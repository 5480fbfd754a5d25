"""A complex pair of poles stands for the whole response: every other pole and every zero is dropped.

The pair is the complex one of smallest decay rate sigma (of several, the one of smallest natural frequency wn). What
may be dropped depends on what is asked for.

For the settling time everything else must be at least five decay rates away (ten in stricter practice): other poles by
their real part, zeros by their distance. Two things follow from that only if little else crowds the pair, and are
asked for on their own: that what is dropped has died away inside the band when the pair enters it, and that it has
not changed the amplitude of the pair's own oscillation by more than a factor of 2.2.

For overshoot, peak time and rise time the yardstick is the natural frequency, not the decay rate: everything else
must be at least five times wn from the origin. A lightly damped pair decays slowly and yet moves fast; a pole or zero
five decay rates away is then in its midst. Far poles that are themselves hardly damped and near each other ring up
together, and zeros make them louder; so it is also asked that they never ring by more than a twentieth of the change,
and add no more than a fiftieth of the overshoot at the pair's peak. Three zeros with no pole nearer than they make a
spike at the start that no distance from the pair prevents.

As a basis of its own it promises what the pair alone would do, computed and proved.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found
from specgate.approximations.conditions import SETTLES, at_least, at_most, between, count, relative_band, words
from specgate.approximations.crowding import (
    Ranges,
    by_decay_rates,
    by_distances,
    excess_of_zeros,
    in_decay_rates,
    in_distances,
)
from specgate.approximations.dropped import dropped_at_peak, dropped_in_band, pair_amplitude, ringing
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient, smallest
from specgate.approximations.pair_measures import of_the_pair
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_SETTLING = ("settling_time",)
_SHAPE = ("overshoot", "peak_time", "rise_time")
_FIVE_TIMES = (
    "N. S. Nise, Control Systems Engineering, chapter 4 (five times); R. C. Dorf, R. H. Bishop, Modern Control "
    "Systems, chapter 5 (ten times)"
)
_LEAST_DAMPED, _MOST_DAMPED = fmpq(1, 20), fmpq(9, 10)
_NO_PAIR = "no complex pair that decays"


def _pair_exists(features: Features, _: Arguments, __: fmpq | None) -> Found:
    return words("there is one" if features.pair is not None else "there is none", features.pair is not None)


def _nearest(figures: Sequence[Answer], yardstick: Answer | None, threshold: fmpq | None, what: str) -> Found:
    """Find the smallest figure in units of the pair's yardstick."""
    if yardstick is None or threshold is None:
        return words(_NO_PAIR, False)
    if not figures:
        return words(f"no {what}", True)
    return at_least(quotient(smallest(figures), yardstick), threshold)


def _separation(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    sigma = features.sigma if features.stable else None
    return _nearest([pole.decay for pole in features.others], sigma, threshold, "other pole")


def _zero_separation(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    sigma = features.sigma if features.stable else None
    return _nearest([zero.distance for zero in features.zeros], sigma, threshold, "zero")


def _distance(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    rest = [spot.distance for spot in (*features.others, *features.zeros)]
    return _nearest(rest, features.natural_frequency, threshold, "other pole or zero")


def _crowding(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _within(by_decay_rates(features), threshold)


def _distance_crowding(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _within(by_distances(features), threshold)


def _dropped(features: Features, arguments: Arguments, threshold: fmpq | None) -> Found:
    band = relative_band(arguments)
    if band is None:
        return words("the band is no part of the change", False)
    return _within(dropped_in_band(features, band), threshold)


def _dropped_at_peak(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _within(dropped_at_peak(features), threshold)


def _excess(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    excess = excess_of_zeros(features)
    return count(excess, threshold is not None and excess <= threshold)


def _ringing(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    return _within(ringing(features), threshold)


def _within(value: Answer | None, threshold: fmpq | None) -> Found:
    if value is None or threshold is None:
        return words(_NO_PAIR, False)
    return at_most(value, threshold)


def _amplitude(features: Features, _: Arguments, threshold: fmpq | None) -> Found:
    value = pair_amplitude(features)
    if value is None or threshold is None:
        return words(_NO_PAIR, False)
    return between(value, 1 / threshold, threshold)


def _damping(features: Features, _: Arguments, __: fmpq | None) -> Found:
    damping = features.damping
    if damping is None:
        return words(_NO_PAIR, False)
    return between(damping, fmpq(0), fmpq(1)) if features.alone else between(damping, _LEAST_DAMPED, _MOST_DAMPED)


def _value(features: Features, arguments: Arguments) -> Answer:
    return of_the_pair(features, _measure(arguments), arguments)


def _measure(arguments: Arguments) -> str:
    return arguments.measure or _SETTLING[0]


_SETTLING_RANGES: Ranges = ((0, 0), (-412, 668), (-456, 862))
_OVERSHOOT_RANGES: Ranges = ((0, 0), (-27, 28), (-80, 54))
_PEAK_RANGES: Ranges = ((0, 0), (-62, 72), (-120, 168))
_RISE_RANGES: Ranges = ((0, 0), (-35, 38), (-166, 166))


def _accuracy(features: Features, arguments: Arguments) -> Accuracy | None:
    measure = _measure(arguments)
    if measure == "overshoot":
        return in_distances(features, _OVERSHOOT_RANGES)
    if measure == "peak_time":
        return in_distances(features, _PEAK_RANGES)
    if measure == "rise_time":
        ordinary = (arguments.lower, arguments.upper) == (fmpq(1, 10), fmpq(9, 10))
        return in_distances(features, _RISE_RANGES) if ordinary or features.alone else None
    band = relative_band(arguments)
    if band is None:
        return None
    shown = fmpq(1, 100) <= band <= fmpq(1, 20)
    return in_decay_rates(features, _SETTLING_RANGES) if shown or features.alone else None


_PAIR = Condition(
    key="pair",
    name="a complex pair of poles exists",
    source="derived",
    required="a complex pair",
    find=_pair_exists,
)

_FOR_SETTLING = (
    Condition(
        key="separation",
        name="other poles at least {threshold} times faster",
        source=_FIVE_TIMES,
        required=">= {threshold}",
        find=_separation,
        threshold=fmpq(5),
        concerns=_SETTLING,
    ),
    Condition(
        key="zero_separation",
        name="zeros at least {threshold} decay rates of the pair from the origin",
        source=_FIVE_TIMES,
        required=">= {threshold}",
        find=_zero_separation,
        threshold=fmpq(5),
        concerns=_SETTLING,
    ),
    Condition(
        key="crowding",
        name="sum of decay rate of the pair over that of each other pole, or distance of each zero",
        source="derived",
        required="<= {threshold}",
        find=_crowding,
        threshold=fmpq(2, 5),
        tighter="smaller",
        concerns=_SETTLING,
    ),
    Condition(
        key="dropped_amplitude",
        name="what the dropped modes still fill of the band when the pair enters it",
        source="derived",
        required="<= {threshold}",
        find=_dropped,
        threshold=fmpq(1, 10),
        tighter="smaller",
        concerns=_SETTLING,
    ),
    Condition(
        key="pair_amplitude",
        name="amplitude of the pair's oscillation against that of the pair alone",
        source="derived",
        required="by a factor of at most {threshold} more or less",
        find=_amplitude,
        threshold=fmpq(11, 5),
        tighter="smaller",
        concerns=_SETTLING,
    ),
)

_FOR_SHAPE = (
    Condition(
        key="distance",
        name="other poles and zeros at least {threshold} natural frequencies of the pair from the origin",
        source="derived",
        required=">= {threshold}",
        find=_distance,
        threshold=fmpq(5),
        concerns=_SHAPE,
    ),
    Condition(
        key="distance_crowding",
        name="sum of natural frequency of the pair over distance of each other pole and zero",
        source="derived",
        required="<= {threshold}",
        find=_distance_crowding,
        threshold=fmpq(2, 5),
        tighter="smaller",
        concerns=_SHAPE,
    ),
    Condition(
        key="excess_of_zeros",
        name="zeros beyond the number of dropped poles, within any distance",
        source="derived",
        required="<= {threshold}",
        find=_excess,
        threshold=fmpq(2),
        tighter="smaller",
        concerns=_SHAPE,
    ),
    Condition(
        key="ringing",
        name="greatest ringing of dropped complex poles, in parts of the change",
        source="derived",
        required="<= {threshold}",
        find=_ringing,
        threshold=fmpq(1, 20),
        tighter="smaller",
        concerns=_SHAPE,
    ),
    Condition(
        key="dropped_at_peak",
        name="what the dropped modes still add when the pair peaks, in parts of its overshoot",
        source="derived",
        required="<= {threshold}",
        find=_dropped_at_peak,
        threshold=fmpq(1, 50),
        tighter="smaller",
        concerns=_SHAPE,
    ),
    Condition(
        key="damping",
        name="damping ratio of the pair",
        source="derived",
        required="0.05 to 0.9 where another pole or zero is dropped, else 0 to 1",
        find=_damping,
        concerns=_SHAPE,
    ),
)

ROW = Approximation(
    name="dominant_pair",
    title="A complex pair stands for the whole response",
    estimates=(*_SETTLING, *_SHAPE),
    formula="the response of wn^2/(s^2 + 2 sigma s + wn^2)",
    source=_FIVE_TIMES,
    conditions=(SETTLES, _PAIR, *_FOR_SETTLING, *_FOR_SHAPE),
    evaluate=_value,
    accuracy=_accuracy,
    text=__doc__,
)
