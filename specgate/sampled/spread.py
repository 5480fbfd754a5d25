"""Numbers that depend on one time: the value in the middle of a ball of times, and the slope over all of it.

A quotient of polynomials in such numbers is enclosed over the ball by the mean value theorem, value + slope * (time -
middle), which is as wide as what is enclosed, up to the square of the ball: terms that move together cancel together.
"""

from __future__ import annotations

from flint import arb


class Spread:
    """middle: a ball of the value in the middle. slope: a ball of the derivative over the ball. away: time - middle."""

    __slots__ = ("away", "middle", "slope", "whole")

    def __init__(self, middle: arb, slope: arb, away: arb) -> None:
        self.middle, self.slope, self.away = middle, slope, away
        self.whole = middle + slope * away

    def __sub__(self, other: Spread) -> Spread:
        return Spread(self.middle - other.middle, self.slope - other.slope, self.away)

    def __mul__(self, other: Spread) -> Spread:
        slope = self.slope * other.whole + self.whole * other.slope
        return Spread(self.middle * other.middle, slope, self.away)

    def __truediv__(self, other: Spread) -> Spread:
        middle = self.middle / other.middle
        # the quotient over the whole ball stands in its own slope
        slope = (self.slope - (self.whole / other.whole) * other.slope) / other.whole
        return Spread(middle, slope, self.away)


def is_hurwitz(coefficients: list[Spread]) -> bool | None:
    """Whether every root lies left of the axis, at every time (True), or not so at any (False); None: not told.

    Routh's array from the low end, as in `circle`; its pivots are quotients of polynomials in the coefficients.
    """
    if coefficients[0].whole < 0:
        zero = Spread(arb(0), arb(0), coefficients[0].away)
        coefficients = [zero - one for one in coefficients]
    elif not coefficients[0].whole > 0:
        return None
    if any(one.whole < 0 for one in coefficients):
        return False
    a, b = coefficients[::2], coefficients[1::2]
    for _ in range(len(coefficients) - 1):
        if b[0].whole < 0:
            return False
        if not b[0].whole > 0:
            return None
        ratio = a[0] / b[0]
        rest = [one - ratio * b[k] if k < len(b) else one for k, one in enumerate(a)][1:]
        a, b = b, rest or [Spread(arb(0), arb(0), a[0].away)]
    return True
