"""The grid that all searches of a response share: blocks of cells over [t0, 2 t0], [2 t0, 4 t0] ..., made on demand."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Iterator
from typing import Protocol

import numpy as np
from flint import fmpq

from specgate.response.budget import Budget
from specgate.response.cells import Cells, cells_between
from specgate.response.segments import exact

_KEPT = 256
"""Chunks kept in memory; older ones are made again when they are asked for again."""

SPLIT = 8
"""Into how many parts a cell is split."""

_FRACTIONS = np.arange(SPLIT + 1, dtype=np.float64) / SPLIT


class Block(Protocol):
    """A stretch of the grid that ends at a normalised time `end`, in `chunks` chunks of cells."""

    @property
    def end(self) -> float:
        """Normalised time at which the block ends."""

    @property
    def chunks(self) -> int:
        """Number of chunks."""

    def index(self, time: fmpq) -> int:
        """Return the chunk that holds `time`, the first or last where it lies outside."""

    def cells(self, index: int) -> Cells:
        """Make a chunk."""


class Grid:
    """Blocks of cells in order of time; `make(k)` makes the k-th block, its predecessors exist."""

    def __init__(self, make: Callable[[list[Block]], Block]) -> None:
        self._make = make
        self._blocks: list[Block] = []
        self._chunks: OrderedDict[tuple[int, int], Cells] = OrderedDict()

    def upward(self, budget: Budget) -> Iterator[Cells]:
        """Yield chunks from the start of the grid on, without end."""
        number = 0
        while True:
            for index in range(self._block(number).chunks):
                yield self._chunk(number, index, budget)
            number += 1

    def downward(self, time: fmpq, budget: Budget) -> Iterator[Cells]:
        """Yield chunks from the one that holds `time` down to the start of the grid."""
        number = 0
        while exact(self._block(number).end) < time:
            number += 1
        index = self._blocks[number].index(time)
        while True:
            while index >= 0:
                yield self._chunk(number, index, budget)
                index -= 1
            number -= 1
            if number < 0:
                return
            index = self._blocks[number].chunks - 1

    def around(self, time: fmpq, budget: Budget) -> Cells:
        """Return the chunk that holds `time`."""
        return next(self.downward(time, budget))

    def _block(self, number: int) -> Block:
        while len(self._blocks) <= number:
            self._blocks.append(self._make(self._blocks))
        return self._blocks[number]

    def _chunk(self, number: int, index: int, budget: Budget) -> Cells:
        key = (number, index)
        if key in self._chunks:
            self._chunks.move_to_end(key)
        else:
            self._chunks[key] = self._blocks[number].cells(index)
            if len(self._chunks) > _KEPT:
                self._chunks.popitem(last=False)
        budget.spend(len(self._chunks[key].left))
        return self._chunks[key]


def split(cells: Cells, which: np.ndarray, budget: Budget) -> Cells:
    """Split the cells with these indices into SPLIT equal parts each, in the order given."""
    budget.spend(SPLIT * len(which))
    left, right = cells.left[which, None], cells.right[which, None]
    nodes = left + (right - left) * _FRACTIONS
    nodes[:, -1] = right[:, 0]
    return cells_between(cells.segment, nodes)
