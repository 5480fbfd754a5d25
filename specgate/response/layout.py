"""Blocks of the grid where the modes are sampled in floats."""

from __future__ import annotations

from functools import cached_property
from math import frexp

import numpy as np
from flint import fmpq

from specgate.response.cells import Cells, cells_between
from specgate.response.deviation import LOWEST, Modal
from specgate.response.grid import Block
from specgate.response.segments import Floats, exact
from specgate.response.tables import FloatModes
from specgate.terms.records import record

CHUNK = 512
"""Cells of a chunk."""

FAR = 2.0**17
"""|p| t beyond which modes are written about the start of the chunk, or their phase would lose its digits."""

_MOST = 2.0**900
_AT_ONCE = 32

_OCTAVES = 24
"""Octaves of a chunk at most: beyond the settled ones there is nothing to see."""


class FloatLayout:
    """Plans the blocks: several short octaves make one chunk, a long octave many."""

    def __init__(self, deviation: Modal, first: float, resolution: float) -> None:
        self._deviation = deviation
        self._first = first
        self._resolution = resolution
        self._counts: list[int] = []

    def block(self, before: list[Block]) -> Block:
        """Return the block that follows."""
        left = before[-1].end if before else self._first
        table = self._deviation.table.alive(left)
        octaves: list[tuple[float, int]] = []
        total, end = 0, left
        while total <= CHUNK and len(octaves) < _OCTAVES:
            count = self._count(end)
            if octaves and (total + count > CHUNK or 2.0 * end * table.speed > FAR):
                break
            octaves.append((end, count))
            total += count
            end *= 2.0
        if len(octaves) == 1:
            return _Octave(self._deviation, table, left, octaves[0][1])
        return _Octaves(table, tuple(octaves))

    def _count(self, left: float) -> int:
        """Return a power of two: cells of the octave so narrow that M4 h^4 / 384 is about the resolution."""
        number = frexp(left / self._first)[1] - 1
        while number >= len(self._counts):
            self._counts += self._further_counts(len(self._counts))
        return self._counts[number]

    def _further_counts(self, number: int) -> list[int]:
        left = self._first * 2.0 ** np.arange(number, number + _AT_ONCE, dtype=np.float64)
        with np.errstate(over="ignore"):  # a growing mode: without bound is a bound, and clipped below
            fourth = self._deviation.table.bounds(left, 2.0 * left)[:, 2]
        wanted = np.clip(left * (fourth / 384.0 / self._resolution) ** 0.25, 1.0, _MOST)
        return [1 << int(power) for power in np.ceil(np.log2(wanted))]


@record
class _Octaves:
    """Whole octaves (left, cells) in one chunk."""

    table: FloatModes
    octaves: tuple[tuple[float, int], ...]
    chunks: int = 1

    @cached_property
    def end(self) -> float:
        return 2.0 * self.octaves[-1][0]

    def index(self, time: fmpq) -> int:
        return 0

    def time(self, index: int) -> float:
        return self.octaves[0][0] if index == 0 else self.end

    def cells(self, index: int) -> Cells:
        nodes = [left + left / count * np.arange(count, dtype=np.float64) for left, count in self.octaves]
        return cells_between(self.table, np.concatenate([*nodes, [self.end]])[None, :])


@record
class _Octave:
    """The octave [left, 2 left] in `count` equal cells; both powers of two, so every node is exact."""

    deviation: Modal
    table: FloatModes
    left: float
    count: int

    @property
    def end(self) -> float:
        return 2.0 * self.left

    @property
    def chunks(self) -> int:
        return max(1, self.count // CHUNK)

    def index(self, time: fmpq) -> int:
        number = ((time / exact(self.left) - 1) * self.chunks).floor()
        return min(self.chunks - 1, max(0, int(number)))

    def time(self, index: int) -> float:
        return self.left * (1.0 + index / self.chunks)

    def cells(self, index: int) -> Cells:
        width = self.left / self.count
        nodes: Floats = width * np.arange(min(self.count, CHUNK) + 1, dtype=np.float64)
        if self.end * self.table.speed <= FAR:
            return cells_between(self.table, (self.left + index * CHUNK * width + nodes)[None, :])
        start = exact(self.left) + index * CHUNK * exact(width)
        return cells_between(self._rebased(start), nodes[None, :])

    def _rebased(self, start: fmpq) -> FloatModes:
        return FloatModes.of(self.deviation.at(LOWEST).rebased(start), start)
