"""All zeros of an analytic function on a stretch of the frequency axis, each in an interval of its own: proved.

On a cell with middle m and half-width h the function lies in f(m) + f'(cell) [-h, h] (mean value theorem). A cell is
done with if that leaves out zero, or if f' does: then it holds one zero or none, as the signs at its ends say. A zero
that f' shares (a tangency) is never done with; such cells are given back as they are.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

from flint import arb, fmpq

from specgate.terms.precision import HIGHEST, working_precision

Function = Callable[[arb], tuple[arb, arb]]
"""Balls of f and f' over a ball of frequencies, at the precision that is set."""

_BITS = 96
_GUARD = 32
_MOST_CELLS = 20_000
_NARROWEST = fmpq(1, 2**60)


class Crossing:
    """The one zero of a function in [left, right], where its slope has one sign; narrowed as asked."""

    def __init__(self, function: Function, left: fmpq, right: fmpq) -> None:
        self._function = function
        self.left, self.right = left, right

    def enclose(self, bits: int) -> arb:
        """Return a ball of relative radius 2^-bits, or as narrow as the highest precision allows."""
        precision = bits + _GUARD
        while True:
            with working_precision(precision):
                ball = arb(self.left).union(arb(self.right))
            if ball.rel_accuracy_bits() >= bits or self.left == self.right:
                return ball
            if not self._narrowed(precision):
                if precision > HIGHEST:
                    return ball
                precision *= 2

    def _narrowed(self, precision: int) -> bool:
        """Take one interval Newton step; return whether it halves the interval at least."""
        with working_precision(precision):
            ball = arb(self.left).union(arb(self.right))
            middle = ball.mid()
            slope = self._function(ball)[1]
            if slope.contains(0):
                return False
            met = ball.intersection(middle - self._function(middle)[0] / slope)
            left, right = max(self.left, met.lower().fmpq()), min(self.right, met.upper().fmpq())
        if 2 * (right - left) > self.right - self.left:
            return False
        self.left, self.right = left, right
        return True


@dataclass
class Zeros:
    """What was found: zeros in order, and cells of which it was not told whether they hold one (none: all is known)."""

    crossings: list[Crossing] = field(default_factory=list)
    untold: list[tuple[fmpq, fmpq]] = field(default_factory=list)


def isolate(function: Function, start: fmpq, end: fmpq) -> Zeros:
    """Return the zeros on [start, end], at none of whose ends the function vanishes."""
    found, cells, count = Zeros(), [(start, end)], 0
    narrowest = (end - start) * _NARROWEST
    while cells:
        left, right = cells.pop()
        count += 1
        verdict = None if count > _MOST_CELLS else _one(function, left, right)
        if verdict is None and right - left > narrowest and count <= _MOST_CELLS:
            middle = left + (right - left) * fmpq(33, 64)
            cells += [(middle, right), (left, middle)]
        elif verdict is None:
            found.untold.append((left, right))
        elif verdict:
            found.crossings.append(Crossing(function, left, right))
    return found


def _one(function: Function, left: fmpq, right: fmpq) -> bool | None:
    """Return whether a cell holds one zero (True) or none (False); None: not told."""
    with working_precision(_BITS):
        middle, away = arb((left + right) / 2), arb(0, arb((right - left) / 2).upper())
        value, slope = function(arb(left).union(arb(right)))
        if not value.contains(0) or not (function(middle)[0] + slope * away).contains(0):
            return False
        if slope.contains(0) or not slope.is_finite():
            return None
    before, after = _sign(function, left), _sign(function, right)
    return None if before is None or after is None else before != after


def _sign(function: Function, at: fmpq) -> int | None:
    bits = _BITS
    while bits <= HIGHEST:
        with working_precision(bits):
            value = function(arb(at))[0]
            if value > 0 or value < 0:
                return 1 if value > 0 else -1
        bits *= 4
    return None
