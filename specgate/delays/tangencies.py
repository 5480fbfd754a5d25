"""Crossings of a loop with dead time that are about to come about or to vanish (see `specgate.frequency.fragile`).

Where the dead time is a factor of L the gain stands still at roots of a polynomial. Elsewhere the zeros of the slope
are isolated in balls, up to where a crossing would not matter. A warning goes with a proved value and is no part of its
proof: a stretch on which the slope is not told apart from zero is passed over.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from flint import arb, fmpq

from specgate.delays.crossings import LateCrossings
from specgate.delays.isolate import Crossing as Zero
from specgate.delays.isolate import isolate
from specgate.frequency.fragile import BY_GAIN, BY_PHASE, Watch, tangencies
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.scale import Continuous
from specgate.frequency.spots import Spot
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision

_BITS = 96
_A_LITTLE_MORE = fmpq(100, 99)


def near_gain(crossings: LateCrossings) -> Watch[GainCrossing]:
    """Return where a change of the gain by 1 % would create or remove points with |L| = 1. Raises OutOfWork."""
    if crossings.undelayed is None:
        found = (
            (crossings.gain_crossing(Answer.of_ball(zero.enclose)), created)
            for zero, created in _still(crossings, "excess", crossings.axis.below_one_beyond(_A_LITTLE_MORE))
        )
        return Watch(BY_GAIN, crossings.gain, found)
    above, below = crossings.undelayed.axis.above, crossings.undelayed.axis.below
    excess = above - below

    def near(spot: Spot) -> bool:
        return spot.sign(50 * excess - below) <= 0 <= spot.sign(50 * excess + below)

    frequency = Continuous().frequency
    exact = ((crossings.gain_crossing(frequency(one.spot)), one.created) for one in tangencies(excess, near))
    return Watch(BY_GAIN, crossings.gain, exact)


def near_phase(crossings: LateCrossings) -> Watch[PhaseCrossing]:
    """Return where a change of the phase by 1/100 rad would create or remove points with L real and negative.

    Raises OutOfWork.
    """
    ups = [one for one in crossings.phase if one.rise > 0]
    end = crossings.last_end(ups) if ups else crossings.axis.below_one_beyond(fmpq(1))
    seen = ((crossings.phase_crossing(zero), created) for zero, created in _still(crossings, "imaginary", end))
    return Watch(BY_PHASE, crossings.phase, ((one, created) for one, created in seen if one is not None))


def _still(
    crossings: LateCrossings, kind: Literal["imaginary", "excess"], end: fmpq | None
) -> Iterator[tuple[Zero, bool]]:
    """Give the places up to a frequency where a function stands still near zero, and on which side of it."""
    axis, start = crossings.axis, crossings.start_of(kind)
    if end is None or not 0 < start < end:
        return
    for zero in isolate(axis.turning(kind), start, end).crossings:
        frequency = zero.enclose(_BITS)
        with working_precision(_BITS):
            value, _, bend = axis.series(kind, frequency)
            n, d = axis.parts(frequency, _BITS)
            if kind == "excess":
                close = 50 * abs(value) < (d * d.conjugate()).real
            else:
                real = (n * d.conjugate()).real
                close = bool(real < 0) and 100 * abs(value) < -real
            if close and not value.contains(0):
                yield zero, bool(value * bend > arb(0))
