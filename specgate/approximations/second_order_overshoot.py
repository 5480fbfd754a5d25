"""Overshoot of a dominant pair from its damping ratio: exp(-pi zeta/sqrt(1 - zeta^2)), in parts of the change.

Exact for a complex pair and nothing else. What counts for other poles and zeros is how far they are from the origin
in units of the pair's natural frequency wn, not of its decay rate: at zeta = 0.1 a zero five decay rates away makes an
overshoot of 176 % where the formula promises 73 %, and a pole there leaves 21 %. A further real pole lowers the
overshoot, so that the promise errs on the safe side; a zero raises it, so that it does not.
"""

from __future__ import annotations

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.crowding import in_distances
from specgate.approximations.features import Features
from specgate.approximations.pair_measures import of_the_pair
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_ACCURACY = ((0, 0), (-27, 28), (-80, 54))
"""Thousandths: pair alone; crowded by at most 0.2, nothing ringing; by at most 0.4 (see crowding)."""


def _overshoot(features: Features, arguments: Arguments) -> Answer:
    return of_the_pair(features, "overshoot", arguments)


def _accuracy(features: Features, _: Arguments) -> Accuracy | None:
    return in_distances(features, _ACCURACY)


ROW = Approximation(
    name="second_order_overshoot",
    title="Overshoot from the damping ratio of the dominant pair",
    estimates=("overshoot",),
    formula="exp(-pi zeta/sqrt(1 - zeta^2))",
    source="exact for the pair; that the pair dominates: derived",
    conditions=(),
    evaluate=_overshoot,
    accuracy=_accuracy,
    text=__doc__,
    premises=("dominant_pair",),
)
