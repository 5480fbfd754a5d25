"""Quasi-polynomials: sums of a polynomial in s times e^(-delay s), with rational coefficients and delays.

Two facts carry what is decided about them. Powers e^(-delay s) with different delays are independent over the
rational functions, so that a sum is zero only if every polynomial is. And for s algebraic and not zero, e^(-delay s) is
transcendental (Lindemann 1882; Baker 1975, theorem 1.4): such an s is a root only if it is one of every polynomial.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cached_property
from math import gcd, lcm

from flint import fmpq, fmpq_poly

from specgate.systems.polynomials import ONE, exact_quotient, monic
from specgate.terms.records import record

NO_DELAY = fmpq(0)


@record
class Quasi:
    """A sum of polynomial(s) times e^(-delay s).

    terms: (delay in s, polynomial); delays ascending and distinct, none of the polynomials zero; none at all for zero.
    """

    terms: tuple[tuple[fmpq, fmpq_poly], ...]

    @staticmethod
    def of(terms: Mapping[fmpq, fmpq_poly]) -> Quasi:
        """Return the sum of terms by delay; zeros are left out."""
        return Quasi(tuple((delay, terms[delay]) for delay in sorted(terms) if terms[delay]))

    @staticmethod
    def rational(polynomial: fmpq_poly) -> Quasi:
        """Return a polynomial without delay."""
        return Quasi.of({NO_DELAY: polynomial})

    def __bool__(self) -> bool:
        """Whether it is not zero."""
        return bool(self.terms)

    def __add__(self, other: Quasi) -> Quasi:
        """Return the sum."""
        return _collected((*self.terms, *other.terms))

    def __mul__(self, other: Quasi) -> Quasi:
        """Return the product."""
        return _collected((d + e, p * q) for d, p in self.terms for e, q in other.terms)

    def scaled(self, factor: fmpq) -> Quasi:
        """Return it times a constant."""
        return Quasi(tuple((delay, p * factor) for delay, p in self.terms)) if factor != 0 else Quasi(())

    def over(self, divisor: fmpq_poly) -> Quasi:
        """Return it divided by a polynomial that divides every term. Raises ArithmeticError if one is left over."""
        return Quasi(tuple((delay, exact_quotient(p, divisor)) for delay, p in self.terms))

    @property
    def undelayed(self) -> fmpq_poly:
        """The polynomial without delay, zero if there is none."""
        return self.terms[0][1] if self.terms and self.terms[0][0] == 0 else fmpq_poly()

    @property
    def delayed(self) -> tuple[tuple[fmpq, fmpq_poly], ...]:
        """The terms with a delay."""
        return self.terms[1:] if self.terms and self.terms[0][0] == 0 else self.terms

    @property
    def is_rational(self) -> bool:
        """Whether no term has a delay."""
        return not self.delayed

    @property
    def polynomial(self) -> fmpq_poly | None:
        """The same as a polynomial, None where it has a delay."""
        return self.undelayed if self.is_rational else None

    @property
    def degree(self) -> int:
        """The highest power of s in any term, -1 for zero."""
        return max((p.degree() for _, p in self.terms), default=-1)

    @cached_property
    def content(self) -> fmpq_poly:
        """The greatest polynomial that divides every term, monic."""
        found = fmpq_poly()
        for _, polynomial in self.terms:
            found = found.gcd(polynomial)
        return monic(found) if found else ONE

    def at_origin(self, count: int) -> list[fmpq]:
        """Return the first coefficients of the power series at s = 0: exact, for e^0 is 1."""
        result = [NO_DELAY] * count
        for delay, polynomial in self.terms:
            factor = fmpq(1)
            for order in range(count):
                for power in range(min(count - order, polynomial.length())):
                    result[order + power] += factor * polynomial[power]
                factor = -factor * delay / (order + 1)
        return result

    def first_at_origin(self) -> tuple[int, fmpq]:
        """Return how often s = 0 is a root, and the first coefficient that is not zero. Raises ValueError for zero.

        A sum of polynomials times exponentials with m coefficients in all has at most m - 1 roots at one place (Polya,
        Szego 1925, part V, 75).
        """
        if not self.terms:
            raise ValueError("every number is a root of zero")
        most = sum(p.length() for _, p in self.terms)
        return next((order, value) for order, value in enumerate(self.at_origin(most)) if value != 0)


def common_unit(delays: Sequence[fmpq]) -> fmpq:
    """Return the largest number of which all delays are whole multiples (zeros allowed, one at least is not)."""
    below = lcm(*(int(delay.q) for delay in delays))
    return fmpq(gcd(*(int(delay.p) * (below // int(delay.q)) for delay in delays)), below)


def _collected(terms: Iterable[tuple[fmpq, fmpq_poly]]) -> Quasi:
    total: dict[fmpq, fmpq_poly] = {}
    for delay, polynomial in terms:
        total[delay] = total.get(delay, fmpq_poly()) + polynomial
    return Quasi.of(total)
