"""Lowest crossover frequency that a real unstable pole p asks for: 2p.

The loop has to act faster than the plant runs away. Of several the fastest counts. The rule is one of plausibility:
it says which crossover is too slow to be promised, not which one this loop has, and so it states no accuracy and
supports no verdict.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.crossover_limits import Limit, row
from specgate.approximations.figures import SHOWN, negative, smallest
from specgate.approximations.opened import OpenedLoop
from specgate.response.answers import Answer


def _rate(opened: OpenedLoop) -> Answer | None:
    right = [pole.decay for pole in opened.poles if not pole.oscillates and pole.decay.enclose(SHOWN) < 0]
    return negative(smallest(right)) if right else None


ROW = row(
    "unstable_pole_limit",
    "Lowest crossover frequency that an unstable pole asks for",
    "wc >= 2p",
    "crossover frequency over the fastest real unstable pole",
    Limit(_rate, fmpq(2), above=True, what="real unstable pole"),
    __doc__,
)
