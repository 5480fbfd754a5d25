"""Questions about one instant or one cell that floats leave open, settled in balls."""

from __future__ import annotations

import numpy as np
from flint import arb, fmpq
from numpy.typing import NDArray

from specgate.response.cells import Cells
from specgate.response.certify import Bracket, Zero
from specgate.response.deviation import LOWEST, Modal
from specgate.response.segments import exact, float_of
from specgate.terms.precision import HIGHEST, working_precision

_CLOSER = (8, 24, 72, 216)
"""Widths of intervals about a node, in halvings of a cell's."""


def sign_at(deviation: Modal, time: fmpq, order: int, target: fmpq) -> int:
    """Return the sign of g^(order)(time) - target, 0 where even the highest precision cannot tell it from zero."""
    if time == 0 and order == 0:
        difference = deviation.initial - target
        return (difference > 0) - (difference < 0)
    bits = LOWEST
    while bits <= HIGHEST:
        expansion = deviation.at(bits)
        with working_precision(expansion.bits):
            value = expansion.deviation(arb(time))[order] - arb(target)
        if value > 0:
            return 1
        if value < 0:
            return -1
        bits *= 2
    return 0


def ends(cells: Cells, index: int) -> tuple[fmpq, fmpq]:
    """Return both ends of a cell as exact normalised times."""
    start = cells.segment.start
    return start + exact(float(cells.left[index])), start + exact(float(cells.right[index]))


def before_time(cells: Cells, time: fmpq | None) -> NDArray[np.bool_]:
    """Return which cells begin before a normalised time (None: all)."""
    if time is None:
        return np.ones(len(cells.left), dtype=np.bool_)
    local = float(np.nextafter(float_of(time - cells.segment.start), np.inf))
    return np.asarray(cells.left < local, dtype=np.bool_)


def turning_point(deviation: Modal, cells: Cells, index: int) -> Zero | int:
    """Return the zero of g' in a cell on which g'' has one sign, or the sign of g' throughout (0: not told).

    A turning point on the very end of a cell (repeated real poles have rational ones) belongs to both cells there.
    """
    left, right = ends(cells, index)
    before = sign_at(deviation, left, 1, fmpq(0))
    after = sign_at(deviation, right, 1, fmpq(0))
    if before == 0 or after == 0:
        return _turning_at(deviation, left if before == 0 else right, right - left) or 0
    if before == after:
        return before
    return Zero(deviation, slope_bracket(cells, index, (left + right) / 2))


def _turning_at(deviation: Modal, node: fmpq, width: fmpq) -> Zero | None:
    """Return the zero of g' next to a node where g' is not told from zero, None if none is proved to be there.

    On an interval about the node that is narrow enough g'' keeps its sign, so that a change of sign of g' from end to
    end leaves exactly one zero.
    """
    for halvings in _CLOSER:
        reach = width / 2**halvings
        low, high = node - reach, node + reach
        expansion = deviation.at(LOWEST + halvings)
        with working_precision(expansion.bits):
            _, _, bend, jerk = expansion.deviation(arb(low).union(arb(high)))
            curved, steepest = not bend.contains(0), float(jerk.abs_upper() * (1 + arb(2) ** -20))
        if not curved:
            continue
        rising = sign_at(deviation, high, 1, fmpq(0))
        if rising != 0 and sign_at(deviation, low, 1, fmpq(0)) == -rising:
            return Zero(deviation, Bracket(1, fmpq(0), low, high, rising > 0, steepest, node))
    return None


def slope_bracket(cells: Cells, index: int, guess: fmpq) -> Bracket:
    """Return the bracket of the zero of g' in a cell where g' changes sign and g'' does not."""
    left, right = ends(cells, index)
    return Bracket(1, fmpq(0), left, right, bool(cells.bend_low[index] > 0.0), float(cells.jerk[index]), guess)


def value_bracket(cells: Cells, index: int, target: fmpq, *, rising: bool) -> Bracket:
    """Return the bracket of the zero of g - target in a cell that g crosses it in once."""
    left, right = ends(cells, index)
    bend = max(-float(cells.bend_low[index]), float(cells.bend_high[index]))
    share = _share(cells, index, float_of(target))
    return Bracket(0, target, left, right, rising, bend, left + (right - left) * exact(share))


def _share(cells: Cells, index: int, target: float) -> float:
    """Return the fraction of the cell at which its Hermite quintic takes the value, about: a starting point only."""
    width = float(cells.right[index] - cells.left[index])
    f0, d0, c0 = (float(value) for value in cells.before[index])
    f1, d1, c1 = (float(value) for value in cells.after[index])
    f0, f1, d0, d1 = f0 - target, f1 - target, width * d0, width * d1
    c0, c1 = 0.5 * width * width * c0, 0.5 * width * width * c1
    rise, slope, bend = f1 - f0 - d0 - c0, d1 - d0 - 2.0 * c0, c1 - c0
    a3, a4, a5 = (
        10.0 * rise - 4.0 * slope + bend,
        -15.0 * rise + 7.0 * slope - 2.0 * bend,
        6.0 * rise - 3.0 * slope + bend,
    )
    low, high = 0.0, 1.0
    x = f0 / (f0 - f1) if f0 * f1 < 0.0 else 0.5
    for _ in range(6):
        value = f0 + x * (d0 + x * (c0 + x * (a3 + x * (a4 + x * a5))))
        steep = d0 + x * (2.0 * c0 + x * (3.0 * a3 + x * (4.0 * a4 + x * 5.0 * a5)))
        low, high = (x, high) if (value < 0.0) == (f0 < 0.0) else (low, x)
        step = x - value / steep if steep != 0.0 else -1.0
        x = step if low < step < high else 0.5 * (low + high)
    return x
