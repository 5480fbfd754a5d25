"""A simple zero of a smooth real function, alone in an interval, enclosed ever more narrowly.

Let f rise, or fall, all over an interval X in which it has a zero r. Then r is the only one there; the sign of f at a
point tells on which side of it r lies; and for every m in X, where f' does not vanish, interval Newton gives r in
m - f(m) / f'(X) (mean value theorem). Where neither gains anything, f(m) is known too coarsely, and the working
precision is doubled.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb

from specgate.terms.precision import working_precision

Function = Callable[[arb, int], arb]
"""A ball of f over a ball of arguments, computed with so many bits."""

_MOST = 1 << 20


class Zero:
    """The zero of `value` in `ball`, on which it is monotone; slope: f'; rising: whether f rises there."""

    def __init__(self, value: Function, slope: Function, ball: arb, *, rising: bool) -> None:
        self._value, self._slope, self._ball, self._rising = value, slope, ball, rising

    def enclose(self, bits: int) -> arb:
        """Return a ball of at least `bits` relative bits that holds the zero, which is not 0; it only gets narrower.

        Raises ArithmeticError where a million bits do not tell the sign of f beside the zero.
        """
        precision = bits + 16
        while self._ball.rel_accuracy_bits() < bits:
            if not self._narrowed(precision):
                precision *= 2
                if precision > _MOST:
                    raise ArithmeticError("a zero could not be enclosed")
        return self._ball

    def _narrowed(self, precision: int) -> bool:
        """Halve the ball at least, or return False where the precision does not suffice for that."""
        ball, middle = self._ball, self._ball.mid()
        value, slope = self._value(middle, precision), self._slope(ball, precision)
        with working_precision(precision):
            if not slope.contains(0):
                met = ball.intersection(middle - value / slope)
                if met.rad() * 2 <= ball.rad():
                    self._ball = met
                    return True
            if value.contains(0):
                return False
            self._ball = middle.union(ball.upper() if (value < 0) == self._rising else ball.lower())
        return True
