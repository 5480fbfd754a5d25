"""Zeros of the deviation and its slope, enclosed in balls to any precision, and signs that are proved."""

from __future__ import annotations

from math import frexp

from flint import arb, fmpq

from specgate.response.deviation import LOWEST, Modal
from specgate.response.modes import GUARD
from specgate.response.segments import float_of
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record

_MARGIN = 16
_STEPS = 6000


@record
class Bracket:
    """An interval with exactly one zero of g^(order) - target, which changes sign there; normalised time.

    rising: whether g^(order) - target goes from minus to plus. bend: a bound of |g^(order + 2)| over the interval.
    guess: where the zero is expected.
    """

    order: int
    target: fmpq
    left: fmpq
    right: fmpq
    rising: bool
    bend: float
    guess: fmpq


class Zero:
    """The zero in a bracket, enclosed ever more narrowly by interval Newton steps.

    The ends are kept as exact numbers: a ball has a radius of 30 bits and would reach over the end of the bracket.
    """

    def __init__(self, deviation: Modal, bracket: Bracket) -> None:
        self._deviation = deviation
        self._bracket = bracket
        self._ends = (_point(bracket.left), _point(bracket.right))
        self._next: arb | None = _point(bracket.guess)
        self._value: arb | None = None

    @property
    def guess(self) -> float:
        """Where the zero lies, about (normalised time)."""
        return float_of(self._bracket.guess)

    def is_also(self, other: Zero) -> bool:
        """Whether two zeros of g' are the same: brackets that overlap hold but one, for g'' keeps its sign on both."""
        one, two = self._bracket, other._bracket
        return one.left < two.right and two.left < one.right

    def enclose(self, bits: int) -> arb:
        """Return a ball of relative radius 2^-bits, or as narrow as the highest precision allows (normalised time)."""
        precision = max(LOWEST, bits + _MARGIN + self._digits_of_phase())
        for _ in range(_STEPS):
            ball = self._ball(precision)
            if ball.rel_accuracy_bits() >= bits + 1:
                return ball
            if not self._step(precision):
                if precision >= HIGHEST + GUARD:
                    break
                precision = min(2 * precision, HIGHEST + GUARD)
        return self._ball(precision)

    def value(self, bits: int) -> arb:
        """Return g at a zero of g': within max|g''| r^2 / 2 of g at the middle of the enclosure of radius r."""
        precision = bits
        while True:
            ball = self.enclose(precision)
            expansion = self._deviation.at(precision)
            with working_precision(expansion.bits):
                middle, radius = ball.mid(), ball.rad()
                values = expansion.deviation(middle)
                bend = values[2].abs_upper() + radius * arb(self._bracket.bend)
                value = values[0] + arb(0, (bend * radius * radius / 2).upper())
            if self._value is None or value.rad() < self._value.rad():
                self._value = value
            if self._value.rel_accuracy_bits() >= bits or precision > HIGHEST:
                return self._value
            precision *= 2

    def _digits_of_phase(self) -> int:
        """Bits that the exponent p t takes before the point."""
        return max(0, frexp(float_of(self._bracket.right))[1])

    def _ball(self, precision: int) -> arb:
        low, high = self._ends
        with working_precision(precision):
            return low.union(high)

    def _step(self, precision: int) -> bool:
        """Narrow the ends, by at least a half; return False where the precision does not suffice for that.

        With x in an interval that holds the zero and G a ball of the slopes over it, the zero is in
        x - (g(x) - target) / G (mean value theorem). An interval within the bracket that comes back into itself holds
        the zero (interval Newton), so one of a few Newton steps is tried before the whole one. Where G holds zero, the
        sign of g(x) - target says on which side of x the zero is.
        """
        bracket, (low, high) = self._bracket, self._ends
        with working_precision(precision):
            middle = self._next if self._next is not None else ((low + high) / 2).mid()
            self._next = None
            if not low < middle < high:
                return False
            values = self._deviation.at(precision - GUARD).deviation(middle)
            offset, slope = values[bracket.order] - arb(bracket.target), values[bracket.order + 1]
            if not slope.contains(0):
                near = 4 * abs(offset / slope).upper()
                found = _newton(middle, offset, slope, arb(bracket.bend) * near)
                inside = middle - near > arb(bracket.left) and middle + near < arb(bracket.right)
                if inside and found is not None and abs(found - middle) < near and self._meet(found):
                    return True
            reach = arb(bracket.bend) * (high - middle).max(middle - low)
            found = _newton(middle, offset, slope, reach)
            if found is not None and self._meet(found):
                return True
            if offset.contains(0):
                return False
            self._ends = (middle, high) if (offset < 0) == bracket.rising else (low, middle)
            return True

    def _meet(self, found: arb) -> bool:
        """Keep what the ends and a ball have in common, if that is at most half of what there was."""
        low, high = self._ends
        below, above = found.lower(), found.upper()
        left, right = (below if below > low else low), (above if above < high else high)
        if 2 * (right - left) > high - low:
            return False
        self._ends = (left, right)
        return True


def _newton(middle: arb, offset: arb, slope: arb, spread: arb) -> arb | None:
    """Return middle - offset / G for the slopes G within `spread` of `slope`, None if they hold zero."""
    slopes = slope + arb(0, spread.upper())
    return None if slopes.contains(0) else middle - offset / slopes


def _point(value: fmpq) -> arb:
    """Return a dyadic number as it is."""
    with working_precision(int(value.p).bit_length() + 2):
        return arb(value)
