"""The positive real roots of an exact polynomial, isolated without looking at any other root.

Let V(a) be the number of changes of sign among the coefficients of p(x + a). V falls as a grows, and V(a) - V(b) is the
number of roots in (a, b], or greater by an even number (Budan 1807, Fourier 1820). So between powers of two with equal
V there is no root, between such with a difference of 1 there is exactly one: the others are cut, between powers of two
first, for the roots of a loop lie decades apart. Inside an octave the changes of sign of (x + 1)^n p((a x + b)/(x + 1))
count instead: by Descartes they bound the roots in (a, b) in the same way, and of a square-free p they are 0 or 1 as
soon as the interval is short beside the distance of the other roots (Obreschkoff 1963), so that cutting ends.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from flint import fmpq, fmpq_poly, fmpz, fmpz_poly, nmod_poly

Interval = tuple[fmpq, fmpq]
"""(a, b) stands for a < x <= b; where a = b that is the root itself."""

_NEXT = fmpz_poly([1, 1])
_DEEPEST = 400
_PRIMES = (10007, 10009, 10037, 10039, 10061, 10067)
"""A polynomial without rational roots has no root modulo about every third of them."""


def positive_intervals(p: fmpz_poly) -> tuple[Interval, ...]:
    """Return intervals with one positive root each, in rising order; p is square-free and p(0) is not 0.

    Raises TooClose for roots that lie less than 2^-400 of their size apart, or complex ones as close to the axis.
    """
    coefficients = p.coeffs()
    if sign_changes(coefficients) == 0:
        return ()
    low, high = _exponent_below(coefficients), -_exponent_below(coefficients[::-1])
    exact = fmpq_poly(p)
    waiting = [(low, high, _past(exact, low), _past(exact, high))]
    found: list[Interval] = []
    while waiting:
        left, right, (before, _), (after, ends) = last = waiting.pop()
        if before - after == 1:
            found.append((_power(right), _power(right)) if ends else (_power(left), _power(right)))
        elif before > after and right - left == 1:
            found += _octave(exact, _power(left), _power(right))
        elif before > after:
            middle = (left + right) // 2
            cut = _past(exact, middle)
            waiting += [(middle, right, cut, last[3]), (left, middle, last[2], cut)]
    return tuple(found)


def may_have_rational_roots(p: fmpz_poly) -> bool:
    """Return False if a polynomial has no rational root: u/v would be one modulo every prime that does not divide v."""
    lead = p.leading_coefficient()
    return all(lead % prime == 0 or bool(nmod_poly(p, prime).roots()) for prime in _PRIMES)


class TooClose(ArithmeticError):
    """Roots that are not told apart within the work limit."""


def sign_changes(coefficients: Sequence[fmpz]) -> int:
    """Return the number of changes of sign in a row of numbers, zeros left out."""
    count, last = -1, None
    for c in coefficients:
        if c:
            positive = c > 0
            count += positive is not last
            last = positive
    return max(count, 0)


def _past(p: fmpq_poly, exponent: int) -> tuple[int, bool]:
    """Return V(a) at a power of two, and whether it is a root."""
    coefficients = p(fmpq_poly([_power(exponent), 1])).numer().coeffs()
    return sign_changes(coefficients), bool(coefficients[0] == 0)


def _octave(p: fmpq_poly, left: fmpq, right: fmpq) -> Iterator[Interval]:
    """Yield the roots in (left, right]. Raises TooClose."""
    waiting = [(left, right)]
    shortest = (right - left) / (1 << _DEEPEST)
    while waiting:
        a, b = waiting.pop()
        if b - a < shortest:
            raise TooClose
        coefficients = p(fmpq_poly([a, b - a])).numer().coeffs()
        ends = bool(p(b) == 0)
        # a root at a belongs to the interval before; what is at b does not count inside
        turned = fmpz_poly(coefficients[::-1] if coefficients[0] else coefficients[:0:-1])(_NEXT)
        inside = sign_changes(turned.coeffs())
        if inside + ends == 1:
            yield (b, b) if ends else (a, b)
        elif inside + ends > 1:
            middle = (a + b) / 2
            waiting += [(middle, b), (a, middle)]


def _exponent_below(coefficients: Sequence[fmpz]) -> int:
    """Return k such that every positive root is greater than 2^k.

    Where |c_j| x^j < 2^-j |c_0| for all c_j of the other sign, they do not outweigh c_0.
    """
    first, *others = coefficients
    size = _bits(first)
    return min((size - 1 - _bits(c)) // j - 1 for j, c in enumerate(others, 1) if c and (c > 0) is not bool(first > 0))


def _bits(c: fmpz) -> int:
    return int(abs(c)).bit_length()


def _power(exponent: int) -> fmpq:
    return fmpq(fmpz(1) << exponent) if exponent >= 0 else fmpq(1, fmpz(1) << -exponent)
