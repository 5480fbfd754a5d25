"""A simple zero of a smooth real function, alone in an interval, enclosed ever more narrowly.

Let f' not vanish on an interval X in which f has a zero r. Then r is the only one there, and for every m in X interval
Newton gives r in m - f(m) / f'(X) (mean value theorem). Where that gains nothing, f(m) or f'(X) is known too coarsely,
and the working precision is doubled.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb

from specgate.terms.precision import working_precision

Function = Callable[[arb, int], arb]
"""A ball of f over a ball of arguments, computed with so many bits."""


class Zero:
    """The zero of `value` in `ball`, on which `slope` (f') does not vanish."""

    def __init__(self, value: Function, slope: Function, ball: arb) -> None:
        self._value, self._slope, self._ball = value, slope, ball

    def enclose(self, bits: int) -> arb:
        """Return a ball of at least `bits` relative bits that holds the zero, which is not 0; it only gets narrower."""
        precision = bits + 16
        while self._ball.rel_accuracy_bits() < bits:
            if not self._narrowed(precision):
                precision *= 2
        return self._ball

    def _narrowed(self, precision: int) -> bool:
        """Meet the ball with one interval Newton step; return False where that does not halve it at least."""
        ball = self._ball
        slope = self._slope(ball, precision)
        if slope.contains(0):
            return False
        middle = ball.mid()
        value = self._value(middle, precision)
        with working_precision(precision):
            met = ball.intersection(middle - value / slope)
        if met.rad() * 2 > ball.rad():
            return False
        self._ball = met
        return True
