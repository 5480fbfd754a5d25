"""Peak time of a dominant pair: pi/wd, half a period of its damped oscillation.

Exact for a complex pair and nothing else. A further pole makes the true peak come later than promised (unsafe), a zero
to the left earlier. With a pole five decay rates away, as is often taken for enough, the promise is 18 % short at
zeta = 0.3 and 7 % at 0.7; with one five natural frequencies away it is at most 6 % short.
"""

from __future__ import annotations

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.crowding import in_distances
from specgate.approximations.features import Features
from specgate.approximations.pair_measures import of_the_pair
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_ACCURACY = ((0, 0), (-62, 72), (-120, 168))
"""Thousandths: pair alone; crowded by at most 0.2, nothing ringing; by at most 0.4 (see crowding)."""


def _peak_time(features: Features, arguments: Arguments) -> Answer:
    return of_the_pair(features, "peak_time", arguments)


def _accuracy(features: Features, _: Arguments) -> Accuracy | None:
    return in_distances(features, _ACCURACY)


ROW = Approximation(
    name="second_order_peak_time",
    title="Peak time from the damped frequency of the dominant pair",
    estimates=("peak_time",),
    formula="pi/wd",
    source="exact for the pair; that the pair dominates: derived",
    conditions=(),
    evaluate=_peak_time,
    accuracy=_accuracy,
    text=__doc__,
    premises=("dominant_pair",),
)
