"""The tail of a settling response: from when on it is proved to stay below a level."""

from __future__ import annotations

from collections.abc import Callable
from math import frexp

from flint import arb, fmpq

from specgate.response.deviation import LOWEST, Modal
from specgate.response.falling import smallest
from specgate.response.modes import Expansion
from specgate.response.segments import exact
from specgate.response.tables import FloatModes
from specgate.terms.precision import working_precision

_STEPS = 6
_BEYOND = fmpq(1, 2**10)
"""How far behind the zero of envelope - level, in time constants of the fastest pole, a tail begins."""


def float_tail(table: FloatModes, level: float) -> float | None:
    """Return a T with |g(t)| <= level for all t >= T, close to the smallest that the envelope gives; None: not found.

    The envelope is the sum over all columns of the supremum of |D| t^j e^(sigma t) over [T, infinity): it never rises
    and bounds |g| from T on. `level` is met with the rounding of the envelope included.
    """
    target = level * (1.0 - 2.0 * table.parts_error)
    if target <= 1e-270:
        return None
    return smallest(lambda times: table.parts(times).sum(axis=1), target, table.parts_at_doublings)


def tail(modal: Modal, level: float, firm: Callable[[int], arb]) -> fmpq | None:
    """Return the tail for a level, exactly; `firm(bits)` encloses the level where floats are too coarse for it.

    With next to no damping the rounding of the envelope alone would be many periods: there it is taken in balls.
    """
    since = float_tail(modal.table, level)
    if since is None:
        return None
    if modal.table.parts_error < modal.table.slowest:
        return exact(since)
    bits = LOWEST - 2 * frexp(modal.table.slowest)[1]
    return _firm_tail(modal.at(bits), firm(bits), exact(since))


def _firm_tail(expansion: Expansion, level: arb, since: fmpq) -> fmpq:
    """Return a tail that is not after `since`: Newton's method on the logarithm of the envelope, and a proof."""
    with working_precision(expansion.bits):
        time = arb(since)
        for _ in range(_STEPS):
            value, slope = _envelope(expansion, time)
            if not slope < 0:
                return since
            time = (time - (value / level).log() * value / slope).mid()
        found = time.mid().fmpq() + _BEYOND
        falls = all(arb(found) * -mode.pole.real > len(mode.coefficients) - 1 for mode in expansion.modes)
        return found if found < since and falls and _envelope(expansion, arb(found))[0] < level else since


def _envelope(expansion: Expansion, time: arb) -> tuple[arb, arb]:
    """Return the sum of |c| t^j e^(sigma t) and its derivative."""
    value, slope = arb(0), arb(0)
    for mode in expansion.modes:
        decay = (mode.pole.real * time).exp()
        for j, c in enumerate(mode.coefficients):
            part = abs(c) * time**j * decay
            value, slope = value + part, slope + part * (mode.pole.real + j / time)
    return value, slope
