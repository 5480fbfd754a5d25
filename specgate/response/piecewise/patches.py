"""Patches: stretches of time inside one piece on which y and its derivatives are enclosed in balls.

On a patch [l, r] with middle m and half-width h the hull of y^(k) is what two enclosures have in common: that over the
ball of times as a whole, and Taylor's form about m with the third derivative over the whole ball as its remainder. The
first is good on wide patches (it is the envelope of a decaying oscillation), the second on narrow ones (order h^3).

Patches form a tree: a patch is cut a little off its middle, at the same places for every question, so that all
searches of one response share the enclosures. Not in the middle, for there turning points of symmetric inputs lie.
"""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Iterator
from functools import cached_property
from math import frexp

from flint import arb, fmpq

from specgate.response.budget import OutOfWork
from specgate.response.modes import dyadic
from specgate.response.pieces import Pieces
from specgate.terms.precision import working_precision
from specgate.terms.records import record

LOOK = 96
"""Bits at which patches are enclosed where nothing cancels."""

_SHARE = fmpq(33, 64)
_UNEVEN = fmpq(509, 512)
"""Keeps the ends of doublings off round numbers, where turning points may lie."""

_LONGEST = 1200


@record
class Line:
    """The line value + slope * t."""

    value: fmpq
    slope: fmpq = fmpq(0)

    def at(self, time: fmpq) -> fmpq:
        """Return the line at a time."""
        return self.value + self.slope * time


LEVEL = Line(fmpq(0))
"""The time axis itself."""

Hull = tuple[arb, arb]
"""The least and the greatest value, both exact numbers; not a number where nothing is known."""


class Patch:
    """A stretch [left, right] of piece `index`; `depth` counts the cuts that it came from."""

    __slots__ = ("__dict__", "bits", "depth", "index", "left", "pieces", "right")

    def __init__(self, pieces: Pieces, index: int, left: fmpq, right: fmpq, bits: int, depth: int = 0) -> None:
        self.pieces = pieces
        self.index = index
        self.left = left
        self.right = right
        self.bits = bits
        self.depth = depth

    def between(self, left: fmpq, right: fmpq) -> Patch:
        """Return a part of the patch that no search has cut."""
        return Patch(self.pieces, self.index, left, right, self.bits)

    @cached_property
    def whole(self) -> tuple[arb, arb, arb, arb]:
        """Balls of y, y', y'', y''' over the whole patch."""
        with working_precision(LOOK):
            span = arb(self.left).union(arb(self.right))
        return self.pieces.derivatives(self.index, span, self.bits)

    @cached_property
    def middle(self) -> tuple[arb, arb, arb, arb]:
        """Balls of y, y', y'', y''' in the middle."""
        with working_precision(self.bits):
            time = arb((self.left + self.right) / 2)
        return self.pieces.derivatives(self.index, time, self.bits)

    @cached_property
    def parts(self) -> tuple[Patch, Patch]:
        """The two patches that this one is cut into, in order of time."""
        cut = self.left + (self.right - self.left) * _SHARE
        return (
            Patch(self.pieces, self.index, self.left, cut, self.bits, self.depth + 1),
            Patch(self.pieces, self.index, cut, self.right, self.bits, self.depth + 1),
        )

    def rough(self, order: int) -> Hull:
        """Return a hull of the derivative of an order, from the ball of times as a whole."""
        ball = self.whole[order]
        with working_precision(self.bits):
            return ball.lower(), ball.upper()

    @cached_property
    def _hulls(self) -> dict[int, Hull]:
        return {}

    def hull(self, order: int) -> Hull:
        """Return the hull of the derivative of an order (0, 1 or 2)."""
        if order not in self._hulls:
            self._hulls[order] = self._above(LEVEL, order)
        return self._hulls[order]

    def above(self, line: Line, order: int) -> Hull:
        """Return the hull of the derivative of an order (0, 1 or 2) of y - line."""
        if line.slope != 0:
            return self._above(line, order)
        low, high = self.hull(order)
        if order > 0 or line.value == 0:
            return low, high
        with working_precision(self.bits):
            return (low - line.value).lower(), (high - line.value).upper()

    def _above(self, line: Line, order: int) -> Hull:
        with working_precision(self.bits):
            middle = (self.left + self.right) / 2
            away = arb(0, arb((self.right - self.left) / 2).upper())
            values = list(self.middle[:3])
            values[0] -= line.at(middle)
            values[1] -= line.slope
            fine = self.whole[3]
            for step in range(2, order - 1, -1):
                fine = values[step] + fine * away / (step + 1 - order)
            return _common(fine, self._whole_above(line, order))

    def _whole_above(self, line: Line, order: int) -> arb:
        ball = self.whole[order]
        if order == 0:
            return ball - arb(line.at(self.left)).union(arb(line.at(self.right)))
        return ball - line.slope if order == 1 else ball


def _common(one: arb, other: arb) -> Hull:
    if not one.is_finite():
        return other.lower(), other.upper()
    if not other.is_finite():
        return one.lower(), one.upper()
    return one.lower().max(other.lower()), one.upper().min(other.upper())


class Ground:
    """The trees of patches over all pieces: finite pieces are one root each, the last one is cut into doublings."""

    def __init__(self, pieces: Pieces) -> None:
        self.pieces = pieces
        self._roots: dict[tuple[int, int], Patch] = {}
        self._starts: dict[int, tuple[fmpq, int] | None] = {}
        self._begins: list[fmpq] = [fmpq(0)]
        self._ended = False

    @cached_property
    def bits(self) -> int:
        """Bits at which patches are enclosed."""
        return LOOK + self.pieces.guard()

    def kinks(self, until: fmpq | None) -> Iterator[tuple[int, fmpq, fmpq | None]]:
        """Yield (index, begin, end) of the pieces that begin before `until` (None: all), in order."""
        index, begin = 0, self.pieces.kink(0)
        while begin is not None and (until is None or begin < until or index == 0):
            end = self.pieces.kink(index + 1)
            yield index, begin, end
            index, begin = index + 1, end

    def span(self, since: fmpq, until: fmpq) -> tuple[int, int]:
        """Return the first and the last piece that reach over since < t < until."""
        last = self.index(until)
        return self.index(since), last - 1 if last > 0 and self.pieces.kink(last) == until else last

    def ends(self, index: int) -> tuple[fmpq, fmpq | None]:
        """Return where a piece begins, and where it ends (None: never). Raises IndexError for none."""
        begin = self.pieces.kink(index)
        if begin is None:
            raise IndexError(index)
        return begin, self.pieces.kink(index + 1)

    def index(self, time: fmpq) -> int:
        """Return the piece that holds a time, at a kink the one that begins there."""
        holding = self.pieces.holding(time)
        if holding is not None:
            return holding
        while not self._ended and self._begins[-1] <= time:
            begin = self.pieces.kink(len(self._begins))
            self._ended = begin is None
            self._begins += [] if begin is None else [begin]
        return bisect_right(self._begins, time) - 1

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return the end of the monotone start of a piece, and which way it goes; None: not told."""
        if index not in self._starts:
            start = self.pieces.start(index)
            begin = None if start is None else self.pieces.kink(index)
            self._starts[index] = None if start is None or begin is None else (begin + start[0], start[1])
        return self._starts[index]

    def roots(self, index: int, begin: fmpq, end: fmpq | None, until: fmpq | None) -> Iterator[Patch]:
        """Yield the roots of a piece that begin before `until` (None: all), in order of time.

        A proved monotone start is a root of its own.
        """
        start = self.start(index)
        number, left = 0, begin
        if start is not None and (end is None or start[0] < end):
            yield self._root(index, number, begin, start[0])
            number, left = 1, start[0]
        if end is not None:
            yield self._root(index, number, left, end)
            return
        step = self._step(index, left - begin)
        while until is None or left < until:
            if number >= _LONGEST:
                raise OutOfWork("the scales of time of the response are too far apart to be searched")
            yield self._root(index, number, left, left + step)
            left, step = left + step, step if number == 0 else 2 * step
            number += 1

    def _step(self, index: int, first: fmpq) -> fmpq:
        speed = self.pieces.speed(index)
        if first > 0:
            return _UNEVEN * first
        return _UNEVEN * (dyadic(-frexp(speed)[1]) if speed > 0.0 else 1)

    def _root(self, index: int, number: int, left: fmpq, right: fmpq) -> Patch:
        key = (index, number)
        if key not in self._roots:
            self._roots[key] = Patch(self.pieces, index, left, right, self.bits)
        return self._roots[key]
