"""The greatest value of a deviation: every summit that may be it, found without a sampling grid."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property, reduce
from typing import Protocol

import numpy as np
from flint import arb, fmpq
from numpy.typing import NDArray

from specgate.response.budget import BALLS, Budget, OutOfWork
from specgate.response.cells import Cells
from specgate.response.certify import Zero
from specgate.response.deviation import Modal
from specgate.response.grid import SPLIT, Grid, split
from specgate.response.panels import PanelMaker
from specgate.response.segments import exact
from specgate.response.signs import before_time, slope_bracket, turning_point
from specgate.response.tables import SLACK
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_CLOSE = 4
_DEEPEST = 12
_GROUP = 64
_BLUR = 8.0
_FEW = 4
_MOST = 4096
"""Summits of one response kept for comparison."""


@record
class Summit:
    """A turning point at which sign * g is greatest nearby; floats that enclose sign * g there."""

    zero: Zero
    low: float
    high: float


class Floor(Protocol):
    """What is reached or approached whatever the summits are."""

    @property
    def low(self) -> float:
        """A float not above it."""

    def level(self, bits: int) -> arb:
        """Return a ball of it."""


Last = Callable[[float, Callable[[int], arb]], fmpq | None]
"""`last(best, firm)`: a time from which on sign * g is at most `best`, in balls `firm(bits)`; None: none is known."""


class Climb:
    """Search for the supremum of sign * g above a floor that is known to be reached or approached.

    `best` is a value that is reached or approached, all others are at most best + slack or on one of the summits.
    """

    def __init__(self, deviation: Modal, sign: int, floor: Floor, budget: Budget, slack: float = 0.0) -> None:
        self._slack = slack
        self._floor = floor
        self._deviation = deviation
        self._sign = sign
        self._budget = budget
        self.best = floor.low
        self.summits: list[Summit] = []
        self._known: float | None = None
        self._last: fmpq | None = None

    def over(self, grid: Grid, end: Last) -> None:
        """Search the grid up to the time end(best) from which on nothing exceeds `best` (None: not known yet).

        Where the envelope first rises its crest is looked at before all else: a good value there saves the way up.
        """
        crest = self._deviation.table.crest_time()
        if crest is not None:
            self._search(grid.around(exact(crest), self._budget), 0, local=False)
            self.summits.clear()
        self._look_to(end)
        for cells in grid.upward(self._budget, self):
            self._search(cells, 0, local=False)
            self._look_to(end)

    def skips(self, left: float, right: float) -> bool:
        """Whether the envelope shows that nothing between two times is of interest."""
        if self._last is None:
            return False
        table = self._deviation.table
        return exact(left) >= self._last or table.crest(left, right) * (1.0 + 2.0 * table.parts_error) < self._bar

    def is_over(self, time: float) -> bool:
        """Whether nothing from `time` on is of interest."""
        return self._last is not None and exact(time) >= self._last

    @cached_property
    def _panels(self) -> PanelMaker:
        return PanelMaker(self._deviation)

    @property
    def _bar(self) -> float:
        """What a cell has to reach to be of interest."""
        return self.best + self._slack

    def firm(self, bits: int) -> arb:
        """Return the best value in balls, from the summits that may have it."""
        with working_precision(bits):
            known = self._floor.level(bits).max(arb(self.best))
            heights = [self._sign * summit.zero.value(bits) for summit in self.summits[:_FEW]]
            return reduce(lambda one, other: one.max(other), heights, known).lower()

    def _look_to(self, end: Last) -> None:
        """Bring the end of the search up to date and drop the summits that are too low by now."""
        if self.best == self._known:
            return
        self.summits = [summit for summit in self.summits if summit.high >= self._bar]
        if len(self.summits) > _MOST:
            raise OutOfWork(f"more than {_MOST} peaks of the response are too close in height to be told apart")
        self._last, self._known = end(self.best, self.firm), self.best

    def _search(self, cells: Cells, depth: int, *, local: bool) -> None:
        """Take up the summits of the cells that may exceed the best value, splitting where that is not told.

        Where rounding hides the slope a panel of its own shows it (`local`: this is one), and balls where that fails.

        A cell on which g is monotone or bent upwards holds no summit: its greatest value is at an end, which is a node
        or belongs to a neighbour. One that is bent downwards, rising at its left and falling at its right end, holds
        exactly one.
        """
        sign = self._sign
        high, upward = (cells.high, cells.bend_low > 0.0) if sign > 0 else (-cells.low, cells.bend_high < 0.0)
        domed = cells.bend_high < 0.0 if sign > 0 else cells.bend_low > 0.0
        before, after = sign * cells.before, sign * cells.after
        nodes = np.maximum(before[:, 0] - cells.before_error[:, 0], after[:, 0] - cells.after_error[:, 0])
        self.best = max(self.best, float(nodes.max()))
        turning = (cells.slope_low <= 0.0) & (cells.slope_high >= 0.0) & ~upward & before_time(cells, self._last)
        single = domed & (before[:, 1] > cells.before_error[:, 1]) & (after[:, 1] < -cells.after_error[:, 1])
        self._take(cells, np.flatnonzero(turning & single & (high >= self._bar)))
        unknown = turning & ~single
        blurred = _blurred(cells)
        while True:
            pending = np.flatnonzero(unknown & (high >= self._bar))
            if not len(pending):
                return
            group = pending[:1]
            sharpened = None
            if blurred[group[0]] and depth < _CLOSE and not local:
                sharpened = self._sharpen(cells, _run(cells, pending[blurred[pending]]))
            if sharpened is not None:
                group = sharpened
            elif depth >= _CLOSE or blurred[group[0]]:
                self._closely(cells, int(group[0]), bool(domed[group[0]]), float(high[group[0]]), depth)
            else:
                sharp = pending[~blurred[pending]]
                group = np.sort(sharp[np.argsort(-high[sharp], kind="stable")[:_GROUP]])
                self._search(split(cells, group, self._budget), depth + 1, local=local)
            unknown[group] = False

    def _sharpen(self, cells: Cells, run: NDArray[np.intp]) -> NDArray[np.intp] | None:
        """Search a run of blurred cells, or its first one, on a panel of its own; None: no panel fits it.

        Return the cells that were searched.
        """
        self._budget.spend(BALLS)
        for group in (run, run[:1]):
            closer = self._panels.closer(cells, int(group[0]), int(group[-1]), 2 * SPLIT)
            if closer is not None:
                self._search(closer, 0, local=True)
                return group
        return None

    def _take(self, cells: Cells, which: NDArray[np.intp]) -> None:
        """Keep the summits of cells that hold exactly one, with their heights.

        Where |g''| >= m on the cell, the summit is at most g'(t)^2 / (2 m) above the value at any t of it.
        """
        if not len(which):
            return
        sign, left, right = self._sign, cells.left[which], cells.right[which]
        rise, fall = cells.before[which, 1], cells.after[which, 1]
        times = left + (right - left) * (rise / (rise - fall))
        for _ in range(2):
            values, _ = cells.segment.sample(times)
            times = np.clip(times - values[:, 1] / values[:, 2], left, right)
        values, errors = cells.segment.sample(times)
        least_bend = np.abs(cells.bend_high[which] if sign > 0 else cells.bend_low[which])
        low = sign * values[:, 0] - errors[:, 0]
        over = (np.abs(values[:, 1]) + errors[:, 1]) ** 2 / (2.0 * least_bend)
        high = sign * values[:, 0] + errors[:, 0] + SLACK * over
        self.best = max(self.best, float(low.max()))
        for k in np.flatnonzero(high >= self._bar):
            index = int(which[k])
            bracket = slope_bracket(cells, index, cells.segment.start + exact(float(times[k])))
            self.summits.append(Summit(Zero(self._deviation, bracket), float(low[k]), float(high[k])))

    def _closely(self, cells: Cells, index: int, domed: bool, high: float, depth: int) -> None:
        """Settle in balls a cell whose slope floats cannot tell from zero."""
        self._budget.spend(BALLS)
        if domed:
            turning = turning_point(self._deviation, cells, index)
            if isinstance(turning, Zero):
                if not any(summit.zero.is_also(turning) for summit in self.summits):
                    self.summits.append(Summit(turning, self.best, high))
            elif turning == 0:
                raise OutOfWork(
                    "whether the response turns within a stretch of time is not told at the highest precision"
                )
            return
        if depth >= _DEEPEST:
            raise OutOfWork("a flat stretch of the response may hold its greatest value and cannot be decided")
        closer = self._panels.closer(cells, index, index, SPLIT)
        parts = split(cells, np.array([index]), self._budget) if closer is None else closer
        self._search(parts, depth + 1, local=closer is not None)


def _blurred(cells: Cells) -> NDArray[np.bool_]:
    """Return the cells on which rounding hides the slope, so that splitting them shows nothing new."""
    error = np.maximum(cells.before_error[:, 1], cells.after_error[:, 1])
    return np.asarray(np.maximum(-cells.slope_low, cells.slope_high) < _BLUR * error, dtype=np.bool_)


def _run(cells: Cells, which: NDArray[np.intp]) -> NDArray[np.intp]:
    """Return the first ones of these cells that follow each other without a gap."""
    gaps = np.flatnonzero(cells.left[which[1:]] != cells.right[which[:-1]])
    return which[: int(gaps[0]) + 1] if len(gaps) else which
