"""Instants of a piecewise response: zeros of y - line or of its slope, enclosed to any precision, and proved signs."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.response.pieces import Pieces
from specgate.response.piecewise.patches import LOOK, Line
from specgate.terms.precision import HIGHEST, working_precision

_GUARD = 32
_STEPS = 20_000


class Zero:
    """The one zero of a derivative of f = y - line in [left, right] of a piece, where that changes its sign.

    order: 0 for f itself, 1 for its slope, 2 for its bend. rising: whether it goes from minus to plus. The ends are
    kept as exact numbers and only ever move towards each other.
    """

    def __init__(
        self, pieces: Pieces, index: int, order: int, line: Line, ends: tuple[fmpq, fmpq], *, rising: bool
    ) -> None:
        self._pieces = pieces
        self.index = index
        self._order = order
        self._line = line
        self._rising = rising
        self.left, self.right = ends
        self._bend: arb | None = None

    def enclose(self, bits: int) -> arb:
        """Return a ball of relative radius 2^-bits, or as narrow as the highest precision allows (s)."""
        precision = max(LOOK, bits + _GUARD)
        for _ in range(_STEPS):
            with working_precision(max(precision, bits + _GUARD)):
                ball = arb(self.left).union(arb(self.right))
            if ball.rel_accuracy_bits() >= bits + 1 or self.left == self.right:
                return ball
            if not self._step(precision):
                if precision > HIGHEST:
                    break
                precision *= 2
        return ball

    def value(self, bits: int) -> arb:
        """Return the derivative before the one that is zero, g say.

        It is within max|g''| r^2 / 2 of g at the middle of an enclosure of radius r, for g' vanishes in it.
        """
        order, precision, best = self._order, bits, None
        while True:
            self.enclose(precision // 2 + _GUARD)
            middle, radius = (self.left + self.right) / 2, (self.right - self.left) / 2
            with working_precision(precision + _GUARD):
                span = arb(self.left).union(arb(self.right))
                instant = arb(middle)
            bend = self._pieces.derivatives(self.index, span, LOOK)[order + 1]
            there = self._pieces.derivatives(self.index, instant, precision + _GUARD)[order - 1]
            with working_precision(precision + _GUARD):
                spread = (bend.abs_upper() * radius * radius / 2).upper()
                line = self._line.at(middle) if order == 1 else self._line.slope if order == 2 else 0
                value = there - line + arb(0, spread)
            if best is None or value.rad() < best.rad():
                best = value
            if best.rel_accuracy_bits() >= bits or precision > HIGHEST:
                return best
            precision *= 2

    def _step(self, precision: int) -> bool:
        """Narrow the ends to at most a half; return False where the precision does not suffice for that.

        With m in the interval and G a ball of the slopes over it, the zero is in m - f(m) / G (mean value theorem).
        Where G holds zero, the sign of f(m) says on which side of m the zero is.
        """
        left, right, order = self.left, self.right, self._order
        with working_precision(precision):
            middle = _dyadic(arb((left + right) / 2))
            if not left < middle < right:
                return False
            span, instant = arb(left).union(arb(right)), arb(middle)
        offset = self._pieces.derivatives(self.index, instant, precision)[order]
        slopes = self._pieces.derivatives(self.index, span, precision)[order + 1]
        with working_precision(precision):
            offset = offset - (self._line.at(middle) if order == 0 else self._line.slope if order == 1 else 0)
            slopes = slopes - self._line.slope if order == 0 else slopes
            if slopes.is_finite() and not slopes.contains(0):
                found = instant - offset / slopes
                below, above = found.lower().fmpq(), found.upper().fmpq()
                below, above = max(left, below), min(right, above)
                if 2 * (above - below) <= right - left and below <= above:
                    self.left, self.right = below, above
                    return True
            if not (offset < 0 or offset > 0):
                return False
            self.left, self.right = (middle, right) if bool(offset < 0) == self._rising else (left, middle)
            return True


def _dyadic(ball: arb) -> fmpq:
    middle: fmpq = ball.mid().fmpq()
    return middle


def exact_at(pieces: Pieces, index: int, order: int, time: fmpq) -> fmpq | None:
    """Return a derivative at an instant of a piece exactly, where the piece is told to be a polynomial."""
    polynomial, begin = pieces.polynomial(index), pieces.kink(index)
    if polynomial is None or begin is None:
        return None
    for _ in range(order):
        polynomial = polynomial.derivative()
    value: fmpq = polynomial(time - begin)
    return value


def sign_at(pieces: Pieces, index: int, order: int, line: Line, time: fmpq, most: int = HIGHEST) -> int | None:
    """Return the proved sign of the derivative of an order of y - line at an instant; None: not told with `most` bits.

    At a kink the piece says which side is meant. Exactly zero is told where the ball is, and of polynomials.
    """
    known = exact_at(pieces, index, order, time)
    if known is not None:
        away = known - (line.at(time) if order == 0 else line.slope if order == 1 else 0)
        return (away > 0) - (away < 0)
    bits = LOOK
    while bits <= most:
        with working_precision(bits):
            instant = arb(time)
        value = pieces.derivatives(index, instant, bits)[order]
        with working_precision(bits):
            value = value - (line.at(time) if order == 0 else line.slope if order == 1 else 0)
            if value > 0:
                return 1
            if value < 0:
                return -1
            if value.is_zero():
                return 0
        bits *= 2
    return None
