"""The tail of a settling response: from when on it is proved to stay below a level."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from specgate.response.segments import Floats
from specgate.response.tables import FloatModes

_FAN = 32
_NARROW = 0.25
_ROUNDS = 16
_FIRST = np.concatenate([[0.0], 2.0 ** np.arange(-40.0, 400.0, 4.0)])


def tail(table: FloatModes, level: float) -> float | None:
    """Return a T with |g(t)| <= level for all t >= T, close to the smallest that the envelope gives; None: not found.

    The envelope is the sum over all columns of the supremum of |D| t^j e^(sigma t) over [T, infinity): it never rises
    and bounds |g| from T on. `level` is met with the rounding of the envelope included.
    """
    target = level * (1.0 - 2.0 * table.parts_error)
    if target <= 1e-270:
        return None
    return smallest(lambda times: table.parts(times).sum(axis=1), target)


def smallest(falling: Callable[[Floats], Floats], target: float) -> float | None:
    """Return a T with falling(T) <= target for a function that never rises, None if there is none in range.

    T is the right end of an interval that holds the smallest one, narrowed _FAN-fold until it is shorter than a quarter
    (of the time constant of the fastest pole) and than a hundredth of T.
    """
    times = _FIRST
    right = 0.0
    for _ in range(_ROUNDS):
        fits = np.flatnonzero(falling(times) <= target)
        if not len(fits):
            return None
        first = int(fits[0])
        if first == 0:
            return float(times[0])
        left, right = float(times[first - 1]), float(times[first])
        if right - left <= min(_NARROW, 0.01 * right):
            break
        times = np.linspace(left, right, _FAN + 1)
    return right
