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

    def time(self, index: int) -> float:
        """Return the time at which a chunk begins, the end of the block for the number of chunks."""

    def index(self, time: fmpq) -> int:
        """Return the chunk that holds `time`, the first or last where it lies outside."""

    def cells(self, index: int) -> Cells:
        """Make a chunk."""


class Scope(Protocol):
    """What a search that goes upward wants to see."""

    def skips(self, left: float, right: float) -> bool:
        """Whether the stretch between two times is of no interest."""

    def is_over(self, time: float) -> bool:
        """Whether nothing from `time` on is of interest."""


class Grid:
    """Blocks of cells in order of time; `make(k)` makes the k-th block, its predecessors exist."""

    def __init__(self, make: Callable[[list[Block]], Block]) -> None:
        self._make = make
        self._blocks: list[Block] = []
        self._chunks: OrderedDict[tuple[int, int], Cells] = OrderedDict()

    def upward(self, budget: Budget, scope: Scope | None = None) -> Iterator[Cells]:
        """Yield chunks from the start of the grid on, those in scope, without end unless the scope has one."""
        number = 0
        while True:
            block = self._block(number)
            for index in _in_scope(block, scope):
                yield self._chunk(number, index, budget)
            if scope is not None and scope.is_over(block.end):
                return
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


def _in_scope(block: Block, scope: Scope | None) -> Iterator[int]:
    """Yield the chunks of a block that a scope does not skip, halving the block until it is told."""
    stack = [(0, block.chunks)]
    while stack:
        first, end = stack.pop()
        if scope is not None and block.chunks > 1 and scope.skips(block.time(first), block.time(end)):
            continue
        if end - first == 1:
            yield first
        else:
            middle = (first + end) // 2
            stack += [(middle, end), (first, middle)]


def split(cells: Cells, which: np.ndarray, budget: Budget) -> Cells:
    """Split the cells with these indices into SPLIT equal parts each, in the order given."""
    budget.spend(SPLIT * len(which))
    left, right = cells.left[which, None], cells.right[which, None]
    nodes = left + (right - left) * _FRACTIONS
    nodes[:, -1] = right[:, 0]
    return cells_between(cells.segment, nodes)
