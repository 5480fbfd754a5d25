"""A response ready to be searched: its deviation, the grid of cells over it, how it starts and how it ends."""

from __future__ import annotations

from functools import cached_property

import numpy as np
from flint import fmpq, fmpq_poly

from specgate.response.asymptote import Lasting, lasting_sign
from specgate.response.budget import Budget
from specgate.response.certify import float_of
from specgate.response.deviation import LOWEST, Deviation
from specgate.response.grid import Grid
from specgate.response.layout import FloatLayout
from specgate.response.start import Start

RESOLUTION = 2e-3
"""How closely cells follow the response at first, in parts of its change."""

WORK = 2_000_000
"""Cells that one search may look at."""


class Course:
    """What all searches of one response share. Raises ValueError for a response that never moves."""

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> None:
        self.deviation = Deviation(numerator, denominator, size)
        start = self.deviation.start
        if start is None:
            raise ValueError("a response that never moves has no course")
        self.start: Start = start

    @cached_property
    def grid(self) -> Grid:
        """The shared grid of cells, from the end of the monotone start on."""
        change = max(abs(float_of(self.deviation.offset)), abs(float_of(self.deviation.initial)), 0.05)
        return Grid(FloatLayout(self.deviation, self.start.length, RESOLUTION * change).block)

    @cached_property
    def lasting(self) -> Lasting | None:
        """The sign that the deviation keeps in the end, if it keeps one and settles."""
        return lasting_sign(self.deviation.at(LOWEST))

    @cached_property
    def start_bend(self) -> float:
        """A bound of |g''| over the monotone start."""
        return float(self.deviation.table.bounds(np.array([0.0]), np.array([self.start.length]))[0, 0])

    @staticmethod
    def budget() -> Budget:
        """Return the work limit of one search."""
        return Budget(WORK)
