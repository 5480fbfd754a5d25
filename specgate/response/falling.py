"""Where a function that never rises falls below a level."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from specgate.response.segments import Floats

DOUBLINGS: Floats = np.concatenate([[0.0], 2.0 ** np.arange(-40.0, 400.0)])
"""Times at which a function is looked at first."""

_FAN = 128
_SHARES = np.arange(_FAN + 1, dtype=np.float64) / _FAN
_NARROW = 0.25
_ROUNDS = 12


def smallest(falling: Callable[[Floats], Floats], target: float, at_doublings: Floats | None = None) -> float | None:
    """Return a T with falling(T) <= target for a function that never rises, None if there is none in range.

    T is the right end of an interval that holds the smallest one, narrowed until it is shorter than a quarter (of the
    time constant of the fastest pole) and than a hundredth of T. at_doublings: its values at DOUBLINGS, if known.
    """
    times, right = DOUBLINGS, 0.0
    values = falling(DOUBLINGS) if at_doublings is None else at_doublings
    for _ in range(_ROUNDS):
        fits = values <= target
        first = int(fits.argmax())
        if not fits[first]:
            return None
        right = float(times[first])
        if first == 0:
            break
        left = float(times[first - 1])
        if right - left <= min(_NARROW, 0.01 * right):
            break
        times = left + (right - left) * _SHARES
        times[-1] = right
        values = falling(times)
    return right
