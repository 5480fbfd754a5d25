"""A sum of modes on a whole piece as one Taylor polynomial: good over wide balls of times, where modes cancel.

About the middle of a piece of half-width h a mode q(x) e^(p x) has coefficients of at most sum |q_j| |p|^(m-j)/(m-j)!.
High powers of q that are small on the piece are left out first. Those coefficients from M on add up, on the disc
|x| <= 2 h, to at most

    B = sum |q_j| (2 h)^j times the tail of e^z at z = 2 |p| h from M - j on,

and by Cauchy's estimate the derivative of order k of what they leave is at most k! B / (h/2)^k for |x| <= 3 h/2.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import factorial

from flint import acb, acb_poly, acb_series, arb, arb_poly, fmpq

from specgate.delays.remainder import ORDERS
from specgate.delays.steps import Mode, Values
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

Moved = tuple[acb, acb_poly]
"""A pole, and the polynomial of its mode in the time from the middle."""

COARSE, FINE = 60, 130
"""Bits, relative to y in the middle, to which a panel is good: for wide balls of times, and for integrals."""

_MOST_TERMS = 240
_STEEPEST = 16.0
"""Speed times width of a piece beyond which no polynomial is made of it."""


@record
class Panel:
    """Polynomials of y and its derivatives in the time from `middle`, each with what it leaves."""

    middle: fmpq
    polynomials: tuple[arb_poly, ...]
    rest: tuple[arb, ...]
    bits: int

    def at(self, time: arb) -> Values:
        """Return balls of y, y', y'', y''' over a ball of times inside the piece."""
        with working_precision(self.bits):
            x = time - self.middle
            a, b, c, d = (p(x) + rest for p, rest in zip(self.polynomials, self.rest, strict=True))
        return a, b, c, d

    def area(self, left: fmpq, right: fmpq) -> arb:
        """Return a ball of the integral of y over a part of the piece."""
        with working_precision(self.bits):
            return self._between(self.polynomials[0], left, right) + self.rest[0] * (right - left)

    def square(self, left: fmpq, right: fmpq) -> arb:
        """Return a ball of the integral of y^2: with y = p + e it is p^2 and e (2 p + e)."""
        with working_precision(self.bits):
            polynomial, rest = self.polynomials[0], self.rest[0]
            height = polynomial(arb(left - self.middle).union(arb(right - self.middle)))
            return self._between(polynomial * polynomial, left, right) + rest * (2 * height + rest) * (right - left)

    def _between(self, polynomial: arb_poly, left: fmpq, right: fmpq) -> arb:
        summed = polynomial.integral()
        return summed(arb(right - self.middle)) - summed(arb(left - self.middle))


def panel(
    terms: Iterable[tuple[fmpq, fmpq, Mode]], left: fmpq, right: fmpq, bits: int, good: int = COARSE
) -> Panel | None:
    """Return the panel of sum of factor * mode(t - origin) on a piece; None where it would take too many terms.

    terms: (origin, factor, mode). good: bits to which it is.
    """
    given = list(terms)
    speed = max((float(abs(mode.pole).mid()) for _, _, mode in given), default=0.0)
    width = int((right - left).p) / int((right - left).q)
    if speed * width > _STEEPEST:
        return None
    middle, half = (left + right) / 2, (right - left) / 2
    with working_precision(bits):
        moved = [_moved(mode, arb(middle - origin), arb(factor) * mode.weight) for origin, factor, mode in given]
        reach = arb(2 * half)
        tiny = (_size(moved, arb(half)) * arb(2) ** -good).upper()
        short, left_out = _shortened(moved, reach, tiny)
        count = _enough(short, reach, tiny)
        if count is None:
            return None
        left_out += sum((_tail(polynomial, pole, reach, count) for pole, polynomial in short), arb(0))
        total = arb_poly([0])
        with series_terms(count):
            for pole, polynomial in short:
                series = acb_series(polynomial.coeffs()) * acb_series(_powers(pole, count))
                total += arb_poly([c.real for c in series.coeffs()])
        rest = [(left_out * factorial(order) / arb(half / 2) ** order).abs_upper() for order in ORDERS]
        polynomials = [total]
        for _ in ORDERS[1:]:
            polynomials.append(polynomials[-1].derivative())
    return Panel(middle, tuple(polynomials), tuple(arb(0, size) for size in rest), bits)


def _moved(mode: Mode, shift: arb, scale: arb) -> Moved:
    """Return a mode in the time from `shift` on."""
    polynomial = mode.polynomials[0](acb_poly([shift, 1])) * ((mode.pole * shift).exp() * scale)
    return mode.pole, polynomial


def _powers(pole: acb, count: int) -> list[acb]:
    """Return the coefficients of e^(pole x)."""
    result, term = [], acb(1)
    for power in range(count):
        result.append(term)
        term = term * pole / (power + 1)
    return result


def _size(moved: Sequence[Moved], half: arb) -> arb:
    """Return about how large the sum, its slope or its bend are in the middle, over the half-width."""
    value, slope, bend = acb(0), acb(0), acb(0)
    for pole, polynomial in moved:
        first = polynomial.derivative() + polynomial * pole
        value, slope = value + polynomial[0], slope + first[0]
        bend += (first.derivative() + first * pole)[0]
    return (abs(value.real) + abs(slope.real) * half + abs(bend.real) * half * half).abs_upper()


def _shortened(moved: Sequence[Moved], reach: arb, tiny: arb) -> tuple[list[Moved], arb]:
    """Return modes without the high powers that add up to less than `tiny` on |x| <= reach, and what those are."""
    result, left_out = [], arb(0)
    for pole, polynomial in moved:
        factors = polynomial.coeffs()
        growth = (abs(pole) * reach).exp()
        while factors:
            size = abs(factors[-1]) * reach ** (len(factors) - 1) * growth
            if not size < tiny / (8 * len(factors) * len(moved)):
                break
            left_out += size
            factors.pop()
        result.append((pole, acb_poly(factors)))
    return result, left_out


def _enough(moved: Sequence[Moved], reach: arb, tiny: arb) -> int | None:
    """Return how many terms leave less than `tiny`."""
    count = 16 + max((polynomial.degree() for _, polynomial in moved), default=0)
    while count <= _MOST_TERMS:
        if sum((_tail(polynomial, pole, reach, count) for pole, polynomial in moved), arb(0)) < tiny:
            return count
        count += 6
    return None


def _tail(polynomial: acb_poly, pole: acb, reach: arb, count: int) -> arb:
    """Return B of the module's text."""
    z = (abs(pole) * reach).upper()
    total, scale = arb(0), arb(1)
    factors = polynomial.coeffs()
    for power, c in enumerate(factors):
        first = count - power
        if not z < first + 1:
            return arb("inf")
        total += abs(c) * scale * z**first / arb(factorial(first)) / (1 - z / (first + 1))
        scale = scale * reach
    return total.abs_upper()
