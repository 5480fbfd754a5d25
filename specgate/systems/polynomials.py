"""Exact polynomials in one variable: the few operations that FLINT does not name."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from flint import fmpq, fmpq_poly, fmpz_poly

ONE = fmpq_poly([1])


def highest_first(coefficients: Sequence[fmpq | int]) -> fmpq_poly:
    """Return the polynomial with these coefficients, highest power first."""
    return fmpq_poly(list(reversed(coefficients)))


def monic(p: fmpq_poly) -> fmpq_poly:
    """Return `p` divided by its leading coefficient; zero stays zero."""
    return p / p.leading_coefficient() if p else p


def primitive(p: fmpq_poly) -> fmpz_poly:
    """Return the positive multiple of `p` with whole coefficients that have no common divisor; zero stays zero."""
    whole = p.numer()
    return whole // whole.content() if whole else whole


def exact_quotient(p: fmpq_poly, divisor: fmpq_poly) -> fmpq_poly:
    """Return p / divisor. Raises ArithmeticError if the division leaves a remainder."""
    quotient, remainder = divmod(p, divisor)
    if remainder:
        raise ArithmeticError("a division that must be exact left a remainder")
    return quotient


def product(factors: Iterable[fmpq_poly]) -> fmpq_poly:
    """Return the product of the factors, 1 if there are none."""
    result = ONE
    for factor in factors:
        result = result * factor
    return result


def least_common_multiple(polynomials: Iterable[fmpq_poly]) -> fmpq_poly:
    """Return the monic least common multiple of polynomials that are not zero, 1 if there are none."""
    result = ONE
    for p in polynomials:
        result = result * (p // result.gcd(p))
    return monic(result)


def order_at_origin(p: fmpq_poly) -> int:
    """Return how often s divides `p`. Raises ValueError for the zero polynomial."""
    for order, coefficient in enumerate(p.coeffs()):
        if coefficient != 0:
            return order
    raise ValueError("every power of s divides zero")


def distinct_roots_times(p: fmpq_poly) -> tuple[tuple[fmpq_poly, int], ...]:
    """Return coprime square-free factors with the multiplicity of their roots in `p`."""
    return tuple((fmpq_poly(factor), multiplicity) for factor, multiplicity in primitive(p).factor_squarefree()[1])
