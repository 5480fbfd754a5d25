"""L(z) with enclosed coefficients on the unit circle: polynomials in x = tan(omega T/2)^2 in balls, and their roots.

As for a rational L (`specgate.frequency.axis`), N(jv) = E(x) + jv O(x), but the coefficients are balls, as narrow as
asked. The positive roots are isolated by Descartes' rule (`descartes`). Where they are not told apart, or the sign of
something is not told up to the highest precision, the question stays open (`Untold`). At x = 0 and x = infinity, where
zeros have a reason, it does not come to that: exact factors keep their zero coefficients exact.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from typing import Protocol

from flint import arb, arb_poly

from specgate.frequency.spots import Sign
from specgate.response.answers import Answer
from specgate.sampled.descartes import positive_roots
from specgate.sampled.transfer import PulseTransfer
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_FIRST = 192
_TOLD = 1024
"""Bits beyond which a sign or two roots are given up."""


class Untold(Exception):
    """What stays open, in words."""


class Balls:
    """The polynomials of L on the axis at one precision."""

    def __init__(self, transfer: PulseTransfer, bits: int, *, unit_at_one: bool) -> None:
        self.bits = bits
        self._unit_at_one = unit_at_one
        above, below = transfer.in_w(bits)
        with working_precision(bits):
            (a, b), (c, d) = parts(above), parts(below)
            (e, f) = parts(above + below)
            x = arb_poly([0, 1])
            self.above = a * a + x * b * b
            """|N|^2"""
            self.below = c * c + x * d * d
            """|D|^2"""
            self.sum = e * e + x * f * f
            """|D + N|^2"""
            self.real = a * c + x * b * d
            """Re(N conj D)"""
            self.imaginary = b * c - a * d
            """Im(N conj D)/v"""

    @cached_property
    def excess(self) -> arb_poly:
        """|N|^2 - |D|^2"""
        with working_precision(self.bits):
            found = self.above - self.below
        return arb_poly([0, *found.coeffs()[1:]]) if self._unit_at_one else found

    @cached_property
    def still(self) -> arb_poly:
        """Zero where |L| stands still."""
        return self._wronskian(self.above, self.below)

    @cached_property
    def sensitive(self) -> arb_poly:
        """Zero where |1 + L| stands still."""
        return self._wronskian(self.below, self.sum)

    def _wronskian(self, p: arb_poly, q: arb_poly) -> arb_poly:
        """Return p' q - p q', without the leading terms that cancel where p and q are of one degree."""
        first, second = p.coeffs(), q.coeffs()
        found = [arb(0)] * max(len(first) + len(second) - 2, 1)
        with working_precision(self.bits):
            for i, a in enumerate(first):
                for j, b in enumerate(second):
                    if i != j:
                        found[i + j - 1] += (i - j) * a * b
        return arb_poly(found)


Pick = Callable[[Balls], arb_poly]


class Place(Protocol):
    """A value of x in (0, infinity)."""

    def enclose(self, bits: int) -> arb:
        """Return a ball that holds x."""


class Axis:
    """L on the axis, at whatever precision is asked for.

    unit_at_one: whether L(1) is known to be 1, so that |N|^2 - |D|^2 vanishes at x = 0.
    """

    def __init__(self, transfer: PulseTransfer, *, unit_at_one: bool = False) -> None:
        self._transfer = transfer
        self._unit_at_one = unit_at_one
        self._known: dict[int, Balls] = {}
        self._roots: dict[str, tuple[Crossed, ...]] = {}

    def at(self, bits: int) -> Balls:
        """Return the polynomials at a precision of at least `bits`."""
        rung = _FIRST
        while rung < bits:
            rung *= 2
        if rung not in self._known:
            self._known[rung] = Balls(self._transfer, rung, unit_at_one=self._unit_at_one)
        return self._known[rung]

    def roots(self, name: str, pick: Pick) -> tuple[Crossed, ...]:
        """Return the positive roots of one of the polynomials. Raises Untold."""
        if name not in self._roots:
            self._roots[name] = self._isolated(pick)
        return self._roots[name]

    def value(self, place: Place, above: Pick, below: Pick, bits: int) -> arb:
        """Return a quotient of two of the polynomials at a place."""
        precision = bits + 32
        while True:
            x, balls = place.enclose(precision), self.at(2 * precision)
            with working_precision(precision + 32):
                value = above(balls)(x) / below(balls)(x)
            if value.rel_accuracy_bits() >= bits or precision > HIGHEST:
                return value
            precision *= 2

    def ratio(self, place: Place, above: Pick, below: Pick) -> Answer:
        """Return it as an answer."""
        return Answer(Proof.ENCLOSED, refine=lambda bits: self.value(place, above, below, bits))

    def sign(self, place: Place, pick: Pick) -> Sign:
        """Return the sign of one of the polynomials at a place. Raises Untold."""
        bits = 64
        while bits <= _TOLD:
            x, balls = place.enclose(bits), self.at(2 * bits)
            with working_precision(2 * bits):
                value = pick(balls)(x)
            if value > 0 or value < 0:
                return 1 if value > 0 else -1
            bits *= 2
        raise Untold("the sign of the open loop at a crossing is not told")

    def _isolated(self, pick: Pick) -> tuple[Crossed, ...]:
        bits = _FIRST
        while bits <= _TOLD:
            found = positive_roots(pick(self.at(bits)), bits)
            if found is not None:
                return tuple(Crossed(self, pick, ball) for ball in found)
            bits *= 2
        raise Untold("two frequencies at which something changes are too close to be told apart")


class Crossed:
    """A positive root of one of the polynomials, simple and alone in its ball."""

    def __init__(self, axis: Axis, pick: Pick, ball: arb) -> None:
        self._axis, self._pick, self._ball = axis, pick, ball

    def enclose(self, bits: int) -> arb:
        """Return a ball that holds x, of at least `bits` relative bits where the highest precision reaches that."""
        precision = max(_FIRST, 2 * bits)
        while self._ball.rel_accuracy_bits() < bits and precision <= 2 * HIGHEST:
            polynomial = self._pick(self._axis.at(precision))
            with working_precision(precision):
                met = self._newton(polynomial)
                half = met if met.rad() * 2 < self._ball.rad() else self._half(polynomial)
            if half is None:
                precision *= 2
            else:
                self._ball = half
        return self._ball

    def _newton(self, polynomial: arb_poly) -> arb:
        """Meet the ball with an interval Newton step (the mean value theorem), where the slope has one sign in it."""
        slope = polynomial.derivative()(self._ball)
        if slope.contains(0):
            return self._ball
        middle = self._ball.mid()
        return self._ball.intersection(middle - polynomial(middle) / slope)

    def _half(self, polynomial: arb_poly) -> arb | None:
        """Return the half of the ball over which the sign changes; None where that is not told."""
        middle, low, high = self._ball.mid(), self._ball.lower(), self._ball.upper()
        ends = [polynomial(place) for place in (low, middle, high)]
        signs = [(value > 0) - (value < 0) for value in ends]
        if signs[0] * signs[1] < 0:
            return low.union(middle)
        return middle.union(high) if signs[1] * signs[2] < 0 else None


def parts(p: arb_poly) -> tuple[arb_poly, arb_poly]:
    """Return E and O of p(jv) = E(x) + jv O(x)."""
    coefficients = p.coeffs()
    even = [-c if k % 2 else c for k, c in enumerate(coefficients[::2])]
    odd = [-c if k % 2 else c for k, c in enumerate(coefficients[1::2])]
    return arb_poly(even or [0]), arb_poly(odd or [0])
