"""A response ready to be searched: its deviation, the grid of cells over it, how it starts and how it ends."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import TypeVar

import numpy as np
from flint import arb, fmpq, fmpq_poly

from specgate.response.asymptote import Lasting, lasting_sign
from specgate.response.budget import Budget, Exhausted, OutOfWork
from specgate.response.deviation import LOWEST, Deviation
from specgate.response.far import keeps_sign
from specgate.response.grid import Grid
from specgate.response.mixed import CANCELLING, MixedLayout
from specgate.response.panels import PanelLayout
from specgate.response.segments import exact
from specgate.response.start import Start
from specgate.response.tail import tail

RESOLUTION = 2e-3
"""How closely cells follow the response at first, in parts of its size."""

FAINT = 1e-30
"""Deviation, in units of the sum of the modes, below which floats are not trusted with its sign."""

HOPELESS = 1e-250
"""Change, in units of the sum of the modes, below which nothing is searched."""

WORK = 600_000
"""Cells that one search may look at."""

_LOOKS = 2.0 ** np.arange(-6.0, 24.0)

Found = TypeVar("Found")


class Course:
    """What all searches of one response share; the response moves."""

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> None:
        self.deviation = Deviation(numerator, denominator, size)

    @cached_property
    def start(self) -> Start:
        """The monotone start. Raises OutOfWork where it is too short for floats, ValueError if nothing ever moves."""
        start = self.deviation.start
        if start is None:
            raise ValueError("a response that never moves has no course")
        return start

    @cached_property
    def _reach(self) -> float:
        """How far the response goes, at least, in units of the sum of its modes."""
        table, change = self.deviation.table, self.deviation.change
        if (table.decay >= 0.0).any():
            return change
        values, errors = table.sample(_LOOKS)
        return max(change, float((np.abs(values[:, 0]) - errors[:, 0]).max()))

    @cached_property
    def _grid(self) -> Grid:
        return Grid(MixedLayout(self.deviation, self.start.length, RESOLUTION * self._reach, self._reach).block)

    @cached_property
    def _panel_grid(self) -> Grid:
        return Grid(PanelLayout(self.deviation, self.start.length, RESOLUTION * self._reach).block)

    def search(self, on: Callable[[Grid, Budget], Found]) -> Found:
        """Search on the grid, or on panels alone where that does not decide. Raises OutOfWork if neither does."""
        if self.deviation.change < HOPELESS:
            raise OutOfWork("the modes of the response cancel beyond the range of floats")
        try:
            return on(self._grid, Budget(WORK))
        except OutOfWork as limit:
            if isinstance(limit, Exhausted) and self._reach > CANCELLING:
                raise
            return on(self._panel_grid, Budget(WORK))

    @cached_property
    def lasting(self) -> Lasting | None:
        """The sign that the deviation keeps in the end, if it keeps one and settles."""
        return lasting_sign(self.deviation.at(LOWEST), self.deviation.denominator)

    def below_from(self, sign: int) -> fmpq | None:
        """Return a time from which on sign * g is proved to be negative, None if there is none or it is not told.

        Where g gets too small for floats before its leading mode outweighs the others, the stretch between is walked
        through with that mode divided out; up to there the search itself has to see the sign.
        """
        lasting = self.lasting
        if lasting is None or lasting.sign == sign:
            return None
        since = exact(lasting.since)
        if self._faint is None or since <= self._faint:
            return since
        return self._faint if self._faint_of_one_sign else None

    @cached_property
    def _faint(self) -> fmpq | None:
        return tail(self.deviation, FAINT, lambda _: arb(FAINT))

    @cached_property
    def _faint_of_one_sign(self) -> bool:
        lasting, faint = self.lasting, self._faint
        return lasting is not None and faint is not None and keeps_sign(self.deviation, lasting, faint, Budget(WORK))

    @cached_property
    def start_bend(self) -> float:
        """A bound of |g''| over the monotone start."""
        return float(self.deviation.table.bounds(np.array([0.0]), np.array([self.start.length]))[0, 0])
