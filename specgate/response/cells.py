"""Cells: stretches of time on which a response and its slope are enclosed from samples at both ends."""

from __future__ import annotations

import numpy as np

from specgate.response.segments import UNIT_ROUNDOFF, Floats, Segment
from specgate.terms.records import record

HERMITE = 1.0 / 384.0
"""|f - Hermite cubic| <= M4 h^4 / 384 (f and f' matched at both ends of a cell of width h)."""

_OPEN = np.array([[-np.inf], [np.inf]] * 3)
"""Ends of the hulls of g, g' and g'' where nothing is known."""

LINEAR = 1.0 / 8.0
"""|f - chord| <= M2 h^2 / 8."""


@record
class Cells:
    """Cells of one segment, n of them, in order of time; all fields in local time and normalised units.

    left, width: where they are. before, after: g, g', g'' at their ends, with error bounds before_error, after_error,
    all (n, 3). low, high: hull of g. slope_low, slope_high: hull of g'. bend_low, bend_high: hull of g''.
    jerk: bound of |g'''|.
    """

    segment: Segment
    left: Floats
    right: Floats
    before: Floats
    before_error: Floats
    after: Floats
    after_error: Floats
    low: Floats
    high: Floats
    slope_low: Floats
    slope_high: Floats
    bend_low: Floats
    bend_high: Floats
    jerk: Floats


def cells_between(segment: Segment, nodes: Floats) -> Cells:
    """Enclose g, g' and g'' on the cells between neighbouring nodes of each row of `nodes`, shape (rows, n + 1).

    The cubic through g and g' at both ends lies in the hull of its Bernstein points; g differs from it by M4 h^4/384
    and by what the rounding of the samples moves the points. The same holds for g' with g'' and M5. g'' lies within
    M4 h^2/8 of its chord. The arithmetic on the points costs less than 8 u of the largest. Where something overflows
    the hulls are open.
    """
    rows, count = nodes.shape
    values, errors = segment.sample(nodes.reshape(-1))
    values, errors = values.reshape(rows, count, 3), errors.reshape(rows, count, 3)
    before, after = values[:, :-1].reshape(-1, 3), values[:, 1:].reshape(-1, 3)
    before_error, after_error = errors[:, :-1].reshape(-1, 3), errors[:, 1:].reshape(-1, 3)
    left, right = nodes[:, :-1].reshape(-1), nodes[:, 1:].reshape(-1)
    width = (right - left) * (1.0 + 2.0 * UNIT_ROUNDOFF)
    bounds = segment.bounds(left, right)
    error = np.maximum(before_error, after_error)
    quartic = width**4 * HERMITE
    low, high = _hull(before, after, 0, width, bounds[:, 2] * quartic + error[:, 0] + width * error[:, 1])
    slope_low, slope_high = _hull(before, after, 1, width, bounds[:, 3] * quartic + error[:, 1] + width * error[:, 2])
    bend = np.maximum(np.abs(before[:, 2]), np.abs(after[:, 2]))
    chord = bounds[:, 2] * width**2 * LINEAR + error[:, 2] + 8.0 * UNIT_ROUNDOFF * bend
    bend_low = np.minimum(before[:, 2], after[:, 2]) - chord
    bend_high = np.maximum(before[:, 2], after[:, 2]) + chord
    hulls = np.stack([low, high, slope_low, slope_high, bend_low, bend_high])
    if not np.isfinite(hulls).all():
        hulls = np.where(np.isfinite(hulls), hulls, _OPEN)
    low, high, slope_low, slope_high, bend_low, bend_high = hulls
    return Cells(
        segment, left, right, before, before_error, after, after_error,
        low, high, slope_low, slope_high, bend_low, bend_high, bounds[:, 1],
    )  # fmt: skip


def _hull(before: Floats, after: Floats, order: int, width: Floats, slack: Floats) -> tuple[Floats, Floats]:
    """Return the hull of the four Bernstein points of a Hermite cubic, widened by `slack` and by rounding."""
    third = width * (1.0 / 3.0)
    start, end = before[:, order], after[:, order]
    second, last = start + third * before[:, order + 1], end - third * after[:, order + 1]
    low = np.minimum(np.minimum(start, end), np.minimum(second, last))
    high = np.maximum(np.maximum(start, end), np.maximum(second, last))
    widened = slack + 8.0 * UNIT_ROUNDOFF * np.maximum(np.abs(low), np.abs(high))
    return low - widened, high + widened
