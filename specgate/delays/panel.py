"""A sum of modes on a whole piece as one Taylor polynomial: good over wide balls of times, where modes cancel.

About the middle of a piece of half-width h a mode q(x) e^(p x) has coefficients of at most sum |q_j| |p|^(m-j)/(m-j)!.
Those from M on add up, on the disc |x| <= 2 h, to at most

    B = sum |q_j| (2 h)^j times the tail of e^z at z = 2 |p| h from M - j on,

and by Cauchy's estimate the derivative of order k of what they leave is at most k! B / (h/2)^k for |x| <= 3 h/2.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import factorial

from flint import acb, acb_poly, acb_series, arb, arb_poly, fmpq

from specgate.delays.remainder import ORDERS
from specgate.delays.steps import Mode, Values
from specgate.terms.precision import series_terms, working_precision

_MOST_TERMS = 120
_STEEPEST = 16.0
"""Speed times width of a piece beyond which no polynomial is made of it."""


@dataclass(frozen=True)
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


def panel(terms: Iterable[tuple[fmpq, fmpq, Mode]], left: fmpq, right: fmpq, bits: int) -> Panel | None:
    """Return the panel of sum of factor * mode(t - origin) on a piece; None where it would take too many terms.

    terms: (origin, factor, mode).
    """
    given = list(terms)
    speed = max((float(abs(mode.pole).mid()) for _, _, mode in given), default=0.0)
    width = int((right - left).p) / int((right - left).q)
    if speed * width > _STEEPEST:
        return None
    degree = max((mode.polynomials[0].degree() for _, _, mode in given), default=0)
    count = min(_MOST_TERMS, int(2.8 * speed * width + bits / 5 + degree))
    middle, half = (left + right) / 2, (right - left) / 2
    with working_precision(bits), series_terms(count):
        total, left_out = arb_poly([0]), arb(0)
        for origin, factor, mode in given:
            shift = arb(middle - origin)
            scale = arb(factor) * mode.weight
            moved = mode.polynomials[0](acb_poly([shift, 1])) * ((mode.pole * shift).exp() * scale)
            series = acb_series(moved.coeffs()) * acb_series([acb(0), mode.pole]).exp()
            total += arb_poly([c.real for c in series.coeffs()])
            left_out += _tail(moved, mode.pole, arb(2 * half), count)
        rest = [(left_out * factorial(order) / arb(half / 2) ** order).abs_upper() for order in ORDERS]
        polynomials = [total]
        for _ in ORDERS[1:]:
            polynomials.append(polynomials[-1].derivative())
    if not all(size.is_finite() for size in rest):
        return None
    return Panel(middle, tuple(polynomials), tuple(arb(0, size) for size in rest), bits)


def _tail(polynomial: acb_poly, pole: acb, reach: arb, count: int) -> arb:
    """Return B of the module's text."""
    z = (abs(pole) * reach).upper()
    total = arb(0)
    for power, c in enumerate(polynomial.coeffs()):
        first = count - power
        if not z < first + 1:
            return arb("inf")
        total += abs(c) * reach**power * z**first / arb(factorial(first)) / (1 - z / (first + 1))
    return total.abs_upper()
