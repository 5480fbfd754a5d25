"""Results that a very small change would move far: a turning point that nearly touches an edge, from either side."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from flint import arb, fmpq

from specgate.response.answers import Fragile
from specgate.response.budget import Budget
from specgate.response.cells import Cells
from specgate.response.certify import Zero
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.grid import Grid, split
from specgate.response.modes import GUARD
from specgate.response.segments import Floats, exact, float_of
from specgate.response.signs import ends, slope_bracket
from specgate.response.walk import Band, Passage
from specgate.terms.precision import working_precision
from specgate.terms.records import record

NEAR = fmpq(1, 100)
"""A turning point within this part of an edge, on either side of it, makes a result fragile."""

_FAR = 0.01
"""Parts of the result by which the other candidate must differ to be worth telling."""

_PROBES = 32
_DIP = 1.0 - 1e-6


@record
class Target:
    """What is crossed: the values at which |g - base| = size, on both sides (a band) or on that of `side`."""

    base: fmpq
    size: fmpq
    side: int | None
    backward: bool

    def band(self, factor: fmpq) -> Band:
        """Return the band with its edges `factor` times as far from the base."""
        reach = self.size * factor
        if self.side is None:
            return Band(self.base - reach, self.base + reach)
        return Band(None, self.base + reach) if self.side > 0 else Band(self.base - reach, None)

    @property
    def margin(self) -> float:
        """How near to an edge is near."""
        return float_of(self.size * NEAR)

    @property
    def stays_beyond(self) -> bool:
        """Whether the final value, where g is 0, lies beyond the edge that is first arrived at: nothing turns back."""
        return self.side is not None and -self.base * self.side >= self.size

    def ratio(self, deviation: Floats) -> Floats:
        """Return how far values of g are from the base, in parts of the size; 1 is the edge."""
        with np.errstate(divide="ignore", invalid="ignore"):
            away = (deviation - float_of(self.base)) / float_of(self.size)
        return np.abs(away) if self.side is None else away * self.side


def fragility(
    course: Course, target: Target, passage: Passage, again: Callable[[Band], Passage], grid: Grid, budget: Budget
) -> Fragile | None:
    """Return why the crossing of a passage is fragile and where else it might be, None if it is not.

    Either a turning point met before the crossing stays just inside of an edge, or the response goes just outside with
    the turning point that follows: `again` finds the crossing of a band with slightly wider edges.
    """
    time = 0.0 if passage.crossing is None else passage.crossing.guess
    for cells, index in passage.near:
        if passage.crossing is not None and _behind(cells, index, time, backward=target.backward):
            continue
        zero = _near_turn(course, target, cells, index, time, budget)
        if zero is not None:
            return _fragile(course, zero, "turns within 1 % of the edge without crossing it")
    if passage.crossing is None or _goes_well_beyond(grid, target, time, budget):
        return None
    reason = "crosses the edge by less than 1 % before it turns back"
    wider = again(target.band(1 + NEAR)).crossing
    if wider is None and target.stays_beyond:
        return None
    if wider is None:
        return Fragile(f"the response {reason}, and nowhere else", (lambda _: arb(0)) if target.backward else None)
    if not _differs(wider.guess, time) or not _dips(course, target, time, wider.guess):
        return None
    return _fragile(course, wider, reason)


def _behind(cells: Cells, index: int, time: float, *, backward: bool) -> bool:
    """Whether a cell lies where the walk would have gone only after the crossing."""
    left, right = map(float_of, ends(cells, index))
    return right < time if backward else left > time


def _fragile(course: Course, zero: Zero, reason: str) -> Fragile:
    def other(bits: int) -> arb:
        return course.deviation.to_time(zero.enclose(bits), bits + GUARD)

    return Fragile(f"the response {reason}", other)


def _differs(one: float, other: float) -> bool:
    return abs(one - other) > _FAR * max(abs(one), abs(other))


def _near_turn(course: Course, target: Target, cells: Cells, index: int, time: float, budget: Budget) -> Zero | None:
    """Return the turning point of a cell if it is far from `time` and comes within the margin of an edge."""
    if not _differs(float_of(ends(cells, index)[0]), time):
        return None
    parts = split(cells, np.array([index]), budget)
    turns = parts.before[:, 1] * parts.after[:, 1] < 0.0
    single = turns & ((parts.bend_low > 0.0) | (parts.bend_high < 0.0))
    height = np.maximum(target.ratio(parts.before[:, 0]), target.ratio(parts.after[:, 0]))
    found = np.flatnonzero(single & (height > 1.0 - float_of(NEAR)))
    if not len(found):
        return None
    part = int(found[0])
    middle = exact(0.5 * (float(parts.left[part]) + float(parts.right[part])))
    return Zero(course.deviation, slope_bracket(parts, part, parts.segment.start + middle))


def _goes_well_beyond(grid: Grid, target: Target, time: float, budget: Budget) -> bool:
    """Whether the nodes next to the crossing show that the response goes beyond by more than the margin: no proof."""
    cells = grid.around(exact(time), budget)
    start = float_of(cells.segment.start)
    ratio = target.ratio(cells.before[:, 0])
    instants = start + cells.left
    outward = ratio[instants < time][::-1] if target.backward else ratio[instants > time]
    beyond, inside = np.flatnonzero(outward > 1.0 + float_of(NEAR)), np.flatnonzero(outward < _DIP)
    return len(beyond) > 0 and (not len(inside) or beyond[0] < inside[0])


def _dips(course: Course, target: Target, one: float, other: float) -> bool:
    """Whether the response is inside of the edge somewhere between two instants, at one of a few probes: no proof."""
    expansion = course.deviation.at(LOWEST)
    with working_precision(expansion.bits):
        probes = [expansion.deviation(arb(one) + (arb(other) - arb(one)) * k / _PROBES)[0] for k in range(1, _PROBES)]
    return bool((target.ratio(np.array([float(probe) for probe in probes])) < _DIP).any())
