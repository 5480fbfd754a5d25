"""Lasting oscillations whose squared frequencies are rational: whether they come back together, and how high they go.

If all quotients of their squared frequencies are squares of rationals, they have a common period. What is left of a
response without its transient is a rational function of its own (partial fractions), and one period of it is searched.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import reduce
from itertools import combinations

from flint import arb, fmpq, fmpq_poly, fmpz

from specgate.response.course import Course
from specgate.response.extremes import Extreme
from specgate.response.supremum import above, exact_floor
from specgate.systems.polynomials import monic, primitive, product
from specgate.terms.precision import working_precision

_BITS = 64


def swinging_factors(denominator: fmpq_poly) -> list[fmpq_poly]:
    """Return the factors s^2 + x with a rational x > 0."""
    factors = [monic(fmpq_poly(factor)) for factor, _ in primitive(denominator).factor()[1]]
    return [one for one in factors if one.degree() == 2 and one[1] == 0 and one[0] > 0]


def independent(squares: Sequence[fmpq]) -> bool:
    """Whether no quotient of two squared frequencies is a square."""
    return not any(_root(one / other) for one, other in combinations(squares, 2))


def common_period(squares: Sequence[fmpq]) -> fmpq | None:
    """Return a time not below the common period of oscillations with these squared frequencies; None: there is none."""
    first, roots = squares[0], []
    for square in squares:
        root = _root(square / first)
        if root is None:
            return None
        roots.append(root)
    below = reduce(lambda one, other: one.lcm(other), (root.q for root in roots), fmpz(1))
    above_ = reduce(lambda one, other: one.gcd(other), ((root * below).p for root in roots), fmpz(0))
    with working_precision(_BITS):
        return (2 * arb.pi() / (arb(first).sqrt() * arb(fmpq(above_, below)))).upper().fmpq()


def periodic_part(course: Course) -> Course:
    """Return what is left of a response without its transient and its offset."""
    numerator, denominator, size = course.deviation.fraction
    swings = product(swinging_factors(denominator))
    # size N / (D s) = U / swings + what decays or stays
    rest = denominator // swings * fmpq_poly([0, 1])
    _, inverse, _ = (rest % swings).xgcd(swings)
    return Course(numerator * size * inverse % swings * fmpq_poly([0, 1]), swings, fmpq(1))


def highest_of_a_period(course: Course, sign: int, period: fmpq) -> Extreme:
    """Return sup sign * y, as a value of y, of a response that is periodic from its start on."""
    floor = exact_floor(course, sign, sign * course.deviation.initial, taken=True)
    return above(course, sign, floor, lambda _, __: period)


def _root(value: fmpq) -> fmpq | None:
    """Return the square root of a positive rational that is a square, None of one that is not."""
    return fmpq(value.p.isqrt(), value.q.isqrt()) if value.p.is_square() and value.q.is_square() else None
