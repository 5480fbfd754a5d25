"""Zeros of the deviation and its slope, enclosed in balls to any precision, and signs that are proved."""

from __future__ import annotations

from dataclasses import dataclass
from math import frexp

from flint import arb, fmpq

from specgate.response.deviation import LOWEST, Modal
from specgate.response.modes import GUARD
from specgate.response.segments import float_of
from specgate.terms.precision import HIGHEST, working_precision

_MARGIN = 16
_STEPS = 400


@dataclass(frozen=True)
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
    """The zero in a bracket, enclosed ever more narrowly by interval Newton steps."""

    def __init__(self, deviation: Modal, bracket: Bracket) -> None:
        self._deviation = deviation
        self._bracket = bracket
        self._ball: arb | None = None

    @property
    def guess(self) -> float:
        """Where the zero lies, about (normalised time)."""
        return float_of(self._bracket.guess)

    def enclose(self, bits: int) -> arb:
        """Return a ball of relative radius 2^-bits, or as narrow as the highest precision allows (normalised time)."""
        wanted = bits + 2
        precision = max(LOWEST, bits + _MARGIN + self._digits_of_phase())
        ball = self._first(precision) if self._ball is None else self._ball
        for _ in range(_STEPS):
            if ball.rel_accuracy_bits() >= wanted:
                break
            smaller = self._step(ball, precision)
            if _gain(ball, smaller) == 0:
                if precision >= HIGHEST + GUARD:
                    break
                precision = min(2 * precision, HIGHEST + GUARD)
            ball = smaller
        self._ball = ball
        return ball

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
            if value.rel_accuracy_bits() >= bits or precision > HIGHEST:
                return value
            precision *= 2

    def _digits_of_phase(self) -> int:
        """Bits that the exponent p t takes before the point."""
        return max(0, frexp(float_of(self._bracket.right))[1])

    def _first(self, precision: int) -> arb:
        with working_precision(precision):
            whole = arb(self._bracket.left).union(arb(self._bracket.right))
        return self._step(whole, precision, self._bracket.guess)

    def _step(self, ball: arb, precision: int, at: fmpq | None = None) -> arb:
        """Return an enclosure within `ball` of the zero.

        With x in the ball and G a ball of the slopes over it, the zero is in x - (g(x) - target) / G (mean value
        theorem); where G holds zero, the sign of g(x) - target says on which side of x it is.
        """
        bracket = self._bracket
        with working_precision(precision):
            middle = arb(at) if at is not None else ball.mid()
            values = self._deviation.at(precision - GUARD).deviation(middle)
            offset = values[bracket.order] - arb(bracket.target)
            reach = (ball - middle).abs_upper()
            slope = values[bracket.order + 1] + arb(0, (reach * arb(bracket.bend)).upper())
            if not slope.contains(0):
                smaller = ball.intersection(middle - offset / slope)
                if _gain(ball, smaller) > 0:
                    return smaller
            if offset.contains(0):
                return ball
            after = (offset < 0) == bracket.rising
            return middle.union(ball.upper()) if after else ball.lower().union(middle)


def _gain(before: arb, after: arb) -> int:
    """Return by how many bits a ball became narrower."""
    return _radius_exponent(before) - _radius_exponent(after)


def _radius_exponent(ball: arb) -> int:
    mantissa, exponent = ball.rad().man_exp()
    return int(mantissa).bit_length() + int(exponent) if mantissa != 0 else -(10**9)
