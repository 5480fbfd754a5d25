"""From an interval with one simple root of a polynomial to a ball on which the polynomial is monotone.

The sign of p at a point tells on which side of it the root lies. Newton's method only proposes points; where it leaves
the interval, that is cut instead, between powers where its ends are far apart.
"""

from __future__ import annotations

from flint import arb, fmpq, fmpz_poly

from specgate.terms.precision import working_precision

_FIRST = 64
_MOST = 1 << 16
_NEAR = 2.0**-12
_WIDE = 8
"""How many steps wide a new interval about the point of Newton's method is."""


def monotone(p: fmpz_poly, left: fmpq, right: fmpq) -> tuple[arb, bool]:
    """Return a ball about the root in (left, right), 0 <= left, p(right) != 0, and whether p rises on the ball.

    Raises ArithmeticError where the sign of p beside the root is not told by very many bits.
    """
    return _Narrowing(p, left, right).result()


class _Narrowing:
    def __init__(self, p: fmpz_poly, left: fmpq, right: fmpq) -> None:
        self._p, self._slope = p, p.derivative()
        self._rising = bool(p(right) > 0)
        self._bits = _FIRST
        with working_precision(max(left.p.bit_length(), right.p.bit_length(), 1) + _FIRST):
            self._left, self._right = arb(left), arb(right)

    def result(self) -> tuple[arb, bool]:
        middle = self._middle()
        while True:
            with working_precision(self._bits):
                ball = self._left.union(self._right)
                if not self._slope(ball).contains(0):
                    return ball, self._rising
                middle = self._step(middle)

    def _step(self, at: arb) -> arb:
        """Narrow the interval at a point in it, and return the next point."""
        value, slope = self._p(at), self._slope(at)
        if not self._told(at, value):
            return self._beside(at)
        step = (value / slope).mid()
        following = (at - step).mid()
        if not (step.is_finite() and self._left < following < self._right):
            return self._middle()
        if abs(step) < _NEAR * at:
            for point in (following - _WIDE * abs(step), following + _WIDE * abs(step)):
                if self._left < point.mid() < self._right:
                    self._told(point.mid(), self._p(point.mid()))
        return following if self._left < following < self._right else self._middle()

    def _beside(self, at: arb) -> arb:
        """Narrow the interval about a point that is not told from the root, or go on with more bits."""
        beside = [(at + at * offset).mid() for offset in (-_NEAR, _NEAR)]
        inside = [point for point in beside if self._left < point < self._right]
        if not any(self._told(point, self._p(point)) for point in inside):
            self._more_bits()
        return self._middle()

    def _told(self, at: arb, value: arb) -> bool:
        """Take a point as the new end on its side of the root, if the sign there is told."""
        if value.contains(0):
            return False
        if bool(value > 0) is self._rising:
            self._right = at
        else:
            self._left = at
        return True

    def _middle(self) -> arb:
        with working_precision(self._bits):
            if self._right > 4 * self._left > 0:
                return (self._left * self._right).sqrt().mid()
            return ((self._left + self._right) / 2).mid()

    def _more_bits(self) -> None:
        self._bits *= 2
        if self._bits > _MOST:
            raise ArithmeticError("the sign of a polynomial beside its root could not be told")
