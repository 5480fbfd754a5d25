"""Time in which a complex pair reaches half of its change: (1.1 + 0.125 zeta + 0.469 zeta^2)/wn, or (1 + 0.7 zeta)/wn.

Fits to the pair alone, -1.12 to +5.04 % and -4.51 to +4.57 % off over all damping ratios below 1. They are no formulas
for a pair that merely dominates: every further pole delays the response by about its time constant, one at five natural
frequencies by a seventh of the delay itself, and a zero to the left shortens it by as much.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Variant
from specgate.approximations.conditions import ALONE
from specgate.approximations.features import Features
from specgate.approximations.fits import Polynomial, over_frequency
from specgate.approximations.variants import offered
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_KUO = "B. C. Kuo, Automatic Control Systems, time-domain analysis of the second-order system"
_QUADRATIC: Polynomial = (fmpq(11, 10), fmpq(1, 8), fmpq(469, 1000))
_LINEAR: Polynomial = (fmpq(1), fmpq(7, 10))


def _of(polynomial: Polynomial) -> Callable[[Features, Arguments], Answer]:
    return lambda features, _: over_frequency(features, polynomial)


def _stated(low: int, high: int) -> Callable[[Features, Arguments], Accuracy]:
    stated = Accuracy(fmpq(low, 10000), fmpq(high, 10000), f"{low / 100:+g} to {high / 100:+g} % (0 < zeta < 1)")
    return lambda _, __: stated


VARIANTS = (
    Variant(
        name="quadratic",
        for_="any damping ratio below 1",
        formula="(1.1 + 0.125 zeta + 0.469 zeta^2)/wn",
        source=_KUO,
        conditions=(ALONE,),
        evaluate=_of(_QUADRATIC),
        accuracy=_stated(-112, 504),
    ),
    Variant(
        name="linear",
        for_="any damping ratio below 1, for mental arithmetic",
        formula="(1 + 0.7 zeta)/wn",
        source=_KUO,
        conditions=(ALONE,),
        evaluate=_of(_LINEAR),
        accuracy=_stated(-451, 457),
    ),
)

ROW = offered(
    VARIANTS,
    name="second_order_delay",
    title="Delay time of a pair",
    estimates=("delay_time",),
    text=__doc__,
    premises=("dominant_pair",),
)
