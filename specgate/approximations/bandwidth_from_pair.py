"""Bandwidth of a complex pair: wn sqrt(1 - 2 zeta^2 + sqrt(4 zeta^4 - 4 zeta^2 + 2)), or (1.851 - 1.196 zeta) wn.

The first is the frequency at which the pair has half of its power, a gain of 1/sqrt(2) = 0.7071. The bandwidth is that
of 3 dB, a gain of 10^(-3/20) = 0.7079, and therefore lower by 0.03 to 0.21 %. The straight line is off by -1.55 to
+2.85 % of it. Both hold for a pair and nothing else: every further pole narrows the band, every zero widens it.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Variant
from specgate.approximations.conditions import ALONE, damping_between
from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.approximations.variants import offered
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_DORF = "R. C. Dorf, R. H. Bishop, Modern Control Systems, chapter 8"


def _of(ratio: Callable[[arb], arb]) -> Callable[[Features, Arguments], Answer]:
    """Return the evaluation of bandwidth over natural frequency as a function of damping."""

    def evaluate(features: Features, _: Arguments) -> Answer:
        damping, frequency = features.damping, features.natural_frequency
        if damping is None or frequency is None:
            return Answer.nothing("there is no complex pair of poles")
        return combined(lambda zeta, wn: ratio(zeta) * wn, damping, frequency)

    return evaluate


def _half_power(zeta: arb) -> arb:
    square = 2 * zeta * zeta
    return (1 - square + (square * square - 2 * square + 2).sqrt()).sqrt()


def _line(zeta: arb) -> arb:
    return fmpq(1851, 1000) - fmpq(1196, 1000) * zeta


def _stated(low: int, high: int, where: str) -> Callable[[Features, Arguments], Accuracy]:
    stated = Accuracy(fmpq(low, 10000), fmpq(high, 10000), f"{low / 100:+g} to {high / 100:+g} % ({where})")
    return lambda _, __: stated


VARIANTS = (
    Variant(
        name="half_power",
        for_="any damping ratio below 1",
        formula="wn sqrt(1 - 2 zeta^2 + sqrt(4 zeta^4 - 4 zeta^2 + 2))",
        source="exact for a gain of 1/sqrt(2)",
        conditions=(ALONE,),
        evaluate=_of(_half_power),
        accuracy=_stated(3, 21, "half power stands for 3 dB"),
    ),
    Variant(
        name="linear",
        for_="damping ratios of 0.3 to 0.8",
        formula="(1.851 - 1.196 zeta) wn",
        source=_DORF,
        conditions=(ALONE, damping_between(fmpq(3, 10), fmpq(4, 5), _DORF)),
        evaluate=_of(_line),
        accuracy=_stated(-155, 285, "damping ratios of 0.3 to 0.8"),
    ),
)

ROW = offered(
    VARIANTS,
    name="bandwidth_from_pair",
    title="Bandwidth of a pair from its natural frequency and damping ratio",
    estimates=("bandwidth",),
    text=__doc__,
    premises=("dominant_pair",),
)
