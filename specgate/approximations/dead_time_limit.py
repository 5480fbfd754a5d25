"""Highest crossover frequency that a dead time leaves: one over the dead time.

At w = 1/theta the dead time takes 57 degrees of phase. A loop that crosses one beyond it needs lead from somewhere
else, and its sensitivity peak tells the price. The rule is one of plausibility: it says what crossover may be promised
at all, not which one this loop has, and so it states no accuracy and supports no verdict.
"""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.crossover_limits import Limit, row
from specgate.approximations.opened import OpenedLoop
from specgate.response.answers import Answer


def _rate(opened: OpenedLoop) -> Answer | None:
    return None if opened.late is None else Answer.of_exact(1 / opened.late[1])


ROW = row(
    "dead_time_limit",
    "Highest crossover frequency that a dead time leaves",
    "wc <= 1/theta",
    "crossover frequency times dead time",
    Limit(_rate, fmpq(1), above=False, what="dead time that is a factor of it"),
    __doc__,
)
