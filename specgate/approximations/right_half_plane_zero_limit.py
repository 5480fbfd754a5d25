"""Highest crossover frequency that a real zero z to the right of the axis leaves: z/2.

Such a zero takes the phase of a pole without its fall of the gain, and the response goes the wrong way first. Of
several the smallest counts. The rule is one of plausibility: it says what crossover may be promised at all, not which
one this loop has, and so it states no accuracy and supports no verdict.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.crossover_limits import Limit, row
from specgate.approximations.figures import SHOWN, smallest
from specgate.approximations.opened import OpenedLoop
from specgate.response.answers import Answer


def _rate(opened: OpenedLoop) -> Answer | None:
    right = [zero.distance for zero in opened.zeros if not zero.oscillates and zero.decay.enclose(SHOWN) < 0]
    return smallest(right) if right else None


ROW = row(
    "right_half_plane_zero_limit",
    "Highest crossover frequency that a zero to the right of the axis leaves",
    "wc <= z/2",
    "crossover frequency over the smallest real zero to the right of the axis",
    Limit(_rate, fmpq(1, 2), above=False, what="real zero to the right of the axis"),
    __doc__,
)
