"""Frequencies of a loop in z on the axis of w: x = tan(omega T/2)^2, so that x = infinity is omega = pi/T."""

from __future__ import annotations

from typing import Protocol

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.spots import Infinity, Rational, Sign, Spot
from specgate.response.answers import Answer
from specgate.systems.polynomials import ONE
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

BEYOND = "beyond half the sampling rate (pi/T) the samples tell nothing new"


class Enclosed(Protocol):
    """A value of x that can be enclosed."""

    def enclose(self, bits: int) -> arb:
        """Return a ball that holds x."""


class SampledScale:
    """Between spots in x and frequencies in [0, pi/T] (rad/s)."""

    variable = "the squared tangent of half the turn from sample to sample"

    def __init__(self, period: fmpq) -> None:
        self.period = period

    def frequency(self, spot: Spot) -> Answer:
        """Return 2 atan(sqrt x)/T; pi/T at the far end."""
        if isinstance(spot, Rational) and spot.x == 0:
            return Answer.of_exact(0)
        return Answer(Proof.ENCLOSED, refine=lambda bits: self.angle(spot, bits))

    def angle(self, spot: Enclosed, bits: int) -> arb:
        """Return a ball of the frequency of a spot."""
        if isinstance(spot, Infinity):
            with working_precision(bits + 16):
                return arb.pi() / self.period
        x = spot.enclose(bits + 16)
        with working_precision(bits + 16):
            return 2 * x.sqrt().atan() / self.period

    def beyond(self, frequency: fmpq) -> bool:
        """Whether a frequency lies beyond half the sampling rate, where nothing new follows."""
        return self._turn(frequency) > 0

    def _turn(self, frequency: fmpq) -> int:
        """Return the sign of frequency - pi/T; they differ, for pi is no rational number."""
        bits = 64
        while True:
            with working_precision(bits):
                difference = arb(frequency) * self.period - arb.pi()
                if difference != 0:
                    return 1 if difference > 0 else -1
            bits *= 2

    def spot(self, frequency: fmpq) -> Spot:
        """Return the spot of a frequency in [0, pi/T); beyond it, the far end."""
        if frequency == 0:
            return Rational(fmpq(0))
        return Infinity() if self.beyond(frequency) else Tangent(frequency * self.period / 2)

    def compare(self, spot: Spot, frequency: fmpq) -> int:
        """Return the sign of the frequency of a spot minus another. Raises ArithmeticError where it is not told."""
        if isinstance(spot, Infinity):
            return -self._turn(frequency)
        if isinstance(spot, Rational) and spot.x == 0:
            return -1 if frequency > 0 else 0
        if frequency == 0:
            return 1
        bits = 64
        while bits <= 65536:
            ball = self.angle(spot, bits)
            with working_precision(bits):
                difference = ball - arb(frequency)
                if difference != 0:
                    return 1 if difference > 0 else -1
            bits *= 2
        raise ArithmeticError("a crossing could not be told from an end of the range")


class Tangent:
    """x = tan(a)^2 for a rational a in (0, pi/2): transcendental, so that no polynomial vanishes there (Lindemann)."""

    def __init__(self, half_angle: fmpq) -> None:
        self._half_angle = half_angle

    def enclose(self, bits: int) -> arb:
        """Return a ball that holds x."""
        with working_precision(bits + 32):
            return arb(self._half_angle).tan() ** 2

    def sign(self, p: fmpq_poly) -> Sign:
        """Return the sign of p(x)."""
        if not p:
            return 0
        bits = 64
        while True:
            x = self.enclose(bits)
            with working_precision(bits):
                value = p.numer()(x)
                if value != 0:
                    return 1 if value > 0 else -1
            bits *= 2

    def ratio(self, p: fmpq_poly, q: fmpq_poly) -> Answer:
        """Return p(x)/q(x)."""

        def refine(bits: int) -> arb:
            precision = bits + 32
            while True:
                x = self.enclose(precision)
                with working_precision(precision):
                    value = p.numer()(x) / q.numer()(x) * fmpq(q.denom(), p.denom())
                if value.rel_accuracy_bits() >= bits or not p:
                    return value
                precision *= 2

        return Answer(Proof.ENCLOSED, refine=refine)

    def turns_round(self, p: fmpq_poly, q: fmpq_poly, times: int) -> bool:
        """Return whether p/q is the cosine of a whole part of a turn: it is transcendental, unless it is constant."""
        constant = p.leading_coefficient() / q.leading_coefficient() if p else fmpq(0)
        return p == q * constant and Rational(fmpq(0)).turns_round(fmpq_poly([constant]), ONE, times)
