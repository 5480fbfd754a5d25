"""Rise time of a dominant pair from 10 % to 90 % of its change, read off one of five published fits.

The cubic follows the pair to a quarter of a per cent and is the one to use; the others are what the cubic replaces:
a constant that holds near zeta = 0.5 only, two straight lines and a parabola. Name another than the cubic by
`variant:` beside `approximation:`. All five are fits to the pair alone. A further pole makes the rise slower
(the promise is then unsafe), a zero to the left faster.

Accuracy within the range of each, for the pair alone; with one pole or zero at the nearest place allowed
(damping ratios of 0.05 to 0.9); with several:

  cubic        -0.25 to +0.15 %; -3.6 to +3.7 %; -17 to +16 %
  constant     -3 to +23 %; -5.4 to +26.9 %; -14.5 to +35.5 %
  linear       -5.7 to +2.8 %; -8.5 to +5.8 %; -20 to +13 %
  quadratic    -14.5 to +4.3 %; -17.2 to +5.3 %; -28.5 to +10 %
  linear_wide  -21.6 to +25.3 %; -15.8 to +28.9 %; -28.5 to +37.5 %

The formulas count from 10 % to 90 %. Times from 0 % to 100 % are second_order_rise_full.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Variant
from specgate.approximations.conditions import counted_between, damping_between
from specgate.approximations.crowding import Ranges, in_distances
from specgate.approximations.features import Features
from specgate.approximations.fits import Polynomial, over_frequency
from specgate.approximations.variants import offered
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_COUNTED = counted_between(fmpq(1, 10), fmpq(9, 10))
_FRANKLIN = "G. F. Franklin, J. D. Powell, A. Emami-Naeini, Feedback Control of Dynamic Systems, chapter 3"
_DORF = "R. C. Dorf, R. H. Bishop, Modern Control Systems, chapter 5"
_NISE = "N. S. Nise, Control Systems Engineering, chapter 4"
_KUO = "B. C. Kuo, Automatic Control Systems, time-domain analysis of the second-order system"


def _variant(
    name: str,
    for_: str,
    formula: str,
    source: str,
    polynomial: Polynomial,
    damping: tuple[fmpq, fmpq],
    ranges: Ranges,
    derived: str = "",
) -> Variant:
    def accuracy(features: Features, _: Arguments) -> Accuracy | None:
        return in_distances(features, ranges)

    return Variant(
        name=name,
        for_=for_,
        formula=formula,
        source=source,
        conditions=(_COUNTED, damping_between(*damping, derived or source)),
        evaluate=_of(polynomial),
        accuracy=accuracy,
    )


def _of(polynomial: Polynomial) -> Callable[[Features, Arguments], Answer]:
    return lambda features, _: over_frequency(features, polynomial)


VARIANTS = (
    _variant(
        "cubic",
        "damping ratios of 0.1 to 0.9: the one to use",
        "(1.76 zeta^3 - 0.417 zeta^2 + 1.039 zeta + 1)/wn",
        _NISE,
        (fmpq(1), fmpq(1039, 1000), fmpq(-417, 1000), fmpq(176, 100)),
        (fmpq(1, 10), fmpq(9, 10)),
        ((fmpq(-5, 2), fmpq(3, 2)), (-36, 37), (-170, 160)),
    ),
    _variant(
        "constant",
        "damping ratios near 0.5",
        "1.8/wn",
        _FRANKLIN,
        (fmpq(9, 5),),
        (fmpq(2, 5), fmpq(3, 5)),
        ((-30, 230), (-54, 269), (-145, 355)),
        derived=f"{_FRANKLIN} (near 0.5); the ends: derived",
    ),
    _variant(
        "linear",
        "damping ratios of 0.3 to 0.8",
        "(2.16 zeta + 0.6)/wn",
        _DORF,
        (fmpq(3, 5), fmpq(216, 100)),
        (fmpq(3, 10), fmpq(4, 5)),
        ((-57, 28), (-85, 58), (-200, 130)),
    ),
    _variant(
        "quadratic",
        "any damping ratio below 1",
        "(1 - 0.4167 zeta + 2.917 zeta^2)/wn",
        _KUO,
        (fmpq(1), fmpq(-4167, 10000), fmpq(2917, 1000)),
        (fmpq(0), fmpq(1)),
        ((-145, 43), (-172, 53), (-285, 100)),
    ),
    _variant(
        "linear_wide",
        "any damping ratio below 1, for mental arithmetic",
        "(0.8 + 2.5 zeta)/wn",
        _KUO,
        (fmpq(4, 5), fmpq(5, 2)),
        (fmpq(0), fmpq(1)),
        ((-216, 253), (-158, 289), (-285, 375)),
    ),
)

ROW = offered(
    VARIANTS,
    name="second_order_rise",
    title="Rise time of the dominant pair",
    estimates=("rise_time",),
    text=__doc__,
    premises=("dominant_pair",),
    alternatives=("dominant_pair",),
)
