"""The first and the last crossing: a walk through the cells in one direction until a band is left."""

from __future__ import annotations

from collections.abc import Iterable
from functools import cached_property
from math import inf

import numpy as np
from flint import arb, fmpq
from numpy.typing import NDArray

from specgate.response.budget import BALLS, Budget, OutOfWork
from specgate.response.cells import Cells
from specgate.response.certify import Bracket, Zero
from specgate.response.deviation import LOWEST, Modal
from specgate.response.grid import SPLIT, split
from specgate.response.panels import PanelMaker
from specgate.response.segments import float_of
from specgate.response.signs import before_time, ends, sign_at, turning_point, value_bracket
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record

Flags = NDArray[np.bool_]

_CLOSE = 4
"""Depth of splitting from which on an undecided cell is looked at in balls."""

_DEEPEST = 14


@record
class Band:
    """low <= g <= high, the edges inside; None: no edge on that side."""

    low: fmpq | None
    high: fmpq | None

    def edge_towards(self, value: float) -> fmpq:
        """Return the edge that a value outside of the band lies beyond."""
        if self.high is not None and (self.low is None or value > float_of(self.low)):
            return self.high
        if self.low is None:
            raise ValueError("a band without edges is never left")
        return self.low

    @cached_property
    def inner(self) -> tuple[float, float]:
        """Floats that are not outside of the edges."""
        low = -inf if self.low is None else float(np.nextafter(float_of(self.low), inf))
        return low, inf if self.high is None else float(np.nextafter(float_of(self.high), -inf))

    @cached_property
    def outer(self) -> tuple[float, float]:
        """Floats that are not inside of the edges."""
        low = -inf if self.low is None else float(np.nextafter(float_of(self.low), -inf))
        return low, inf if self.high is None else float(np.nextafter(float_of(self.high), inf))


@record
class Passage:
    """What a walk met: the crossing at which it left the band, if it did.

    touching: instants before it at which g is not told from an edge at the highest precision.
    near: cells before it on which a turning point may come within the margin of an edge.
    """

    crossing: Zero | None
    touching: tuple[Zero, ...]
    near: tuple[tuple[Cells, int], ...]


class Walk:
    """A walk through cells; `backward` tells the direction.

    Where it starts, and from normalised time `end` on (None: nowhere), the band is known to hold.
    """

    def __init__(
        self,
        deviation: Modal,
        band: Band,
        budget: Budget,
        *,
        backward: bool,
        end: fmpq | None,
        margin: float,
    ) -> None:
        self._deviation = deviation
        self._end = end
        self._band = band
        self._budget = budget
        self._backward = backward
        self._margin = margin
        self._touching: list[Zero] = []
        self._near: list[tuple[Cells, int]] = []

    def through(self, chunks: Iterable[Cells]) -> Zero | None:
        """Return the first crossing of an edge on the way, None if the band holds to the end of the chunks."""
        for cells in chunks:
            found = self._first(cells, 0)
            if found is not None or not (self._backward or before_time(cells, self._end)[-1]):
                return found
        return None

    def passage(self, crossing: Zero | None) -> Passage:
        """Return what was met so far, with the crossing that ended the walk."""
        return Passage(crossing, tuple(self._touching), tuple(self._near))

    @cached_property
    def _panels(self) -> PanelMaker:
        return PanelMaker(self._deviation)

    def _first(self, cells: Cells, depth: int) -> Zero | None:
        passes, leaves = self._sorted(cells)
        pending = np.flatnonzero(~passes & before_time(cells, self._end))
        if self._backward:
            pending = pending[::-1]
        position, size = 0, 1
        while position < len(pending):
            index = int(pending[position])
            if leaves[index]:
                return self._crossing(cells, index)
            if depth >= _CLOSE:
                found = self._closely(cells, index, depth)
                position += 1
            else:
                group = pending[position : position + size]
                stop = np.flatnonzero(leaves[group])
                group = group[: int(stop[0])] if len(stop) else group
                found = self._first(split(cells, np.sort(group), self._budget), depth + 1)
                position, size = position + len(group), min(4 * size, 64)
            if found is not None:
                return found
        return None

    def _sorted(self, cells: Cells) -> tuple[Flags, Flags]:
        """Return which cells stay in the band, and which are monotone and end outside; the near end is inside."""
        low, high = self._band.inner
        one_way = (cells.slope_low > 0.0) | (cells.slope_high < 0.0)
        far, errors = (cells.before, cells.before_error) if self._backward else (cells.after, cells.after_error)
        value, error = far[:, 0], errors[:, 0]
        inside = (value - error >= low) & (value + error <= high)
        passes = ((cells.low >= low) & (cells.high <= high)) | (one_way & inside)
        self._watch(cells, passes & ~one_way)
        low, high = self._band.outer
        return passes, one_way & ((value + error < low) | (value - error > high))

    def _watch(self, cells: Cells, turning: Flags) -> None:
        """Keep the cells on which a turning point may come within the margin of an edge."""
        low, high = self._band.outer
        close = turning & ((cells.low < low + self._margin) | (cells.high > high - self._margin))
        self._near.extend((cells, int(index)) for index in np.flatnonzero(close))

    def _crossing(self, cells: Cells, index: int) -> Zero:
        outside = float((cells.before if self._backward else cells.after)[index, 0])
        edge = self._band.edge_towards(outside)
        return self._leaving(cells, index, edge, 1 if edge == self._band.high else -1)

    def _leaving(self, cells: Cells, index: int, edge: fmpq, outward: int) -> Zero:
        rising = (outward > 0) != self._backward
        return Zero(self._deviation, value_bracket(cells, index, edge, rising=rising))

    def _closely(self, cells: Cells, index: int, depth: int) -> Zero | None:
        """Settle in balls a cell that floats leave open: too close to an edge for them."""
        self._budget.spend(BALLS)
        if float(cells.slope_low[index]) > 0.0 or float(cells.slope_high[index]) < 0.0:
            return self._to_far_end(cells, index)
        if float(cells.bend_low[index]) > 0.0 or float(cells.bend_high[index]) < 0.0:
            turning = turning_point(self._deviation, cells, index)
            if isinstance(turning, Zero):
                return self._over(turning, cells, index)
            if turning != 0:
                return self._to_far_end(cells, index)
        if depth >= _DEEPEST:
            raise OutOfWork("a flat stretch of the response is too close to the edge of the band to be decided")
        closer = self._panels.closer(cells, index, index, SPLIT)
        parts = split(cells, np.array([index]), self._budget) if closer is None else closer
        return self._first(parts, depth + 1)

    def _to_far_end(self, cells: Cells, index: int) -> Zero | None:
        """Pass a cell if its far end is inside; it is monotone, or turns without leaving the band."""
        left, right = ends(cells, index)
        far = left if self._backward else right
        for edge, outward in ((self._band.low, -1), (self._band.high, 1)):
            if edge is None:
                continue
            sign = sign_at(self._deviation, far, 0, edge)
            if sign == outward:
                return self._leaving(cells, index, edge, outward)
            if sign == 0:
                self._touching.append(Zero(self._deviation, Bracket(0, edge, far, far, True, 0.0, far)))
        return None

    def _over(self, turning: Zero, cells: Cells, index: int) -> Zero | None:
        """Pass a cell that holds one turning point if that stays inside, keep it if that cannot be told."""
        top = float(cells.bend_high[index]) < 0.0
        edge = self._band.high if top else self._band.low
        if edge is None:
            return self._to_far_end(cells, index)
        bits = LOWEST
        while bits <= HIGHEST:
            with working_precision(bits + 64):
                excess = (turning.value(bits) - arb(edge)) * (1 if top else -1)
            if excess < 0:
                return self._to_far_end(cells, index)
            if excess > 0:
                return self._up_to(turning, cells, index, 1 if top else -1, excess)
            bits *= 2
        self._touching.append(turning)
        return None

    def _up_to(self, turning: Zero, cells: Cells, index: int, outward: int, excess: arb) -> Zero:
        """Return the crossing between the near end of a cell and the turning point beyond the edge.

        At a distance of sqrt(excess / max|g''|) / 2 from it, g is still beyond the edge by 7/8 of the excess; the sign
        of g' there shows that it is on the near side. The crossing is about sqrt(2 excess / |g''|) away.
        """
        left, right = ends(cells, index)
        edge = self._band.high if outward > 0 else self._band.low
        assert edge is not None
        bend = max(-float(cells.bend_low[index]), float(cells.bend_high[index]))
        bits = LOWEST
        while bits <= HIGHEST:
            summit = turning.enclose(bits)
            with working_precision(2 * bits):
                distance = (excess.lower() / bend).sqrt() * (1 if self._backward else -1)
                inner, guess = ((summit + distance * share).mid().fmpq() for share in (arb(0.5), arb(2).sqrt()))
            beyond = left < inner < right and sign_at(self._deviation, inner, 0, edge) == outward
            if beyond and sign_at(self._deviation, inner, 1, fmpq(0)) == (-outward if self._backward else outward):
                left, right = (inner, right) if self._backward else (left, inner)
                guess = guess if left < guess < right else (left + right) / 2
                rising = (outward > 0) != self._backward
                return Zero(self._deviation, Bracket(0, edge, left, right, rising, bend, guess))
            bits *= 2
        raise OutOfWork("a crossing next to a turning point is not told from it at the highest precision")
