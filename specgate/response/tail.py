"""The tail of a settling response: from when on it is proved to stay below a level."""

from __future__ import annotations

from specgate.response.falling import smallest
from specgate.response.tables import FloatModes


def tail(table: FloatModes, level: float) -> float | None:
    """Return a T with |g(t)| <= level for all t >= T, close to the smallest that the envelope gives; None: not found.

    The envelope is the sum over all columns of the supremum of |D| t^j e^(sigma t) over [T, infinity): it never rises
    and bounds |g| from T on. `level` is met with the rounding of the envelope included.
    """
    target = level * (1.0 - 2.0 * table.parts_error)
    if target <= 1e-270:
        return None
    return smallest(lambda times: table.parts(times).sum(axis=1), target, table.parts_at_doublings)
