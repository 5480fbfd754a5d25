"""The measures of a response that consists of the dominant pair alone."""

from __future__ import annotations

from flint import fmpq

from specgate.approximations import pair
from specgate.approximations.conditions import relative_band
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer


def of_the_pair(features: Features, measure: str, arguments: Arguments) -> Answer:
    """Return what a measure would be without any other pole or zero, or why there is no such value."""
    found = features.pair
    if found is None:
        return Answer.nothing("there is no complex pair of poles")
    if not features.stable:
        return Answer.nothing("the response does not settle")
    if measure == "overshoot":
        return _overshoot(features, arguments)
    if measure == "peak_time":
        return pair.peak_time(found)
    if measure == "rise_time":
        return pair.rise_time(found, arguments.lower, arguments.upper)
    if measure == "delay_time":
        return pair.arrival(found, fmpq(1, 2))
    band = relative_band(arguments)
    if measure != "settling_time" or band is None or not 0 < band < 1:
        return Answer.nothing("the pair alone gives no value for this")
    return pair.settling_time(found, band)


def _overshoot(features: Features, arguments: Arguments) -> Answer:
    """Return the overshoot in parts of the change, or in the signal's unit where that is asked for."""
    found, gain = features.pair, features.steady_gain
    assert found is not None
    part = pair.overshoot(found)
    if not arguments.absolute:
        return part
    change = abs((gain or 0) * features.subject.size)
    return combined(lambda ball: ball * change, part)
