"""The tail of a response with real poles: what the other poles and zeros add to the mode of the slowest one."""

from __future__ import annotations

from collections.abc import Iterator

from flint import arb, fmpq

from specgate.approximations.approximation import Condition, Found
from specgate.approximations.conditions import words
from specgate.approximations.features import Features
from specgate.approximations.spots import Spot
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision


def faster(features: Features) -> Iterator[Spot]:
    """Yield every pole but the slowest one."""
    slowest = features.slowest
    passed = False
    for pole in features.poles:
        if not passed and slowest is not None and pole.index == slowest.index:
            passed = True
        else:
            yield pole


def _real_poles(features: Features, _: Arguments, __: fmpq | None) -> Found:
    """Find whether there are poles and all of them are real."""
    oscillating = sum(pole.oscillates for pole in features.poles)
    if not features.poles:
        return words("no poles", False)
    return words(f"{oscillating} of {len(features.poles)} not real" if oscillating else "all real", oscillating == 0)


def tail_growth(features: Features) -> Answer | None:
    """Return the sum of ln(p/(p - p1)) over the other poles, that of the zeros taken off; None where there is none.

    A zero at s = z counts as ln|1 + p1/z|: it is the logarithm of the slowest mode's amplitude, in parts of the change.
    """
    slowest = features.slowest
    others = list(faster(features))
    at_the_slowest = slowest is not None and any(pole.index == slowest.index for pole in others)
    at_origin = any(zero.distance_squared.exact == 0 for zero in features.zeros)
    if slowest is None or slowest.oscillates or at_the_slowest or at_origin or not features.stable:
        return None

    def refine(bits: int) -> arb:
        p1 = slowest.decay.enclose(bits)
        places = [(pole.at(bits), -1) for pole in others] + [(zero.at(bits), 1) for zero in features.zeros]
        with working_precision(bits):
            return sum((sign * abs(1 + p1 / place).log() for place, sign in places), arb(0))

    return Answer.of_ball(refine)


REAL_POLES = Condition(
    key="real_poles", name="real poles only", source="derived", required="all real", find=_real_poles
)
"""That no mode oscillates, and that there is one."""
