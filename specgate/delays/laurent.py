"""Power series of quasi-polynomials about a point, in balls; principal parts of their quotients."""

from __future__ import annotations

from collections.abc import Sequence

from flint import acb, acb_poly, acb_series, arb, fmpq_poly

from specgate.systems.quasi import Quasi


def of_polynomial(polynomial: fmpq_poly, point: acb) -> acb_series:
    """Return p(point + x), in the series length that is set."""
    return acb_series(acb_poly(polynomial)(acb_poly([point, 1])).coeffs())


def of_quasi(quasi: Quasi, point: acb) -> acb_series:
    """Return the power series of a quasi-polynomial at a point, in the series length that is set."""
    total = acb_series([0])
    for delay, polynomial in quasi.terms:
        term = of_polynomial(polynomial, point)
        if delay != 0:
            rate = arb(delay)
            term = term * acb_series([-point * rate, -rate]).exp()
        total = total + term
    return total


def without_root(series: acb_series, times: int) -> acb_series:
    """Return a series divided by x^times: the coefficients left out are known to be zero."""
    return acb_series(list(series.coeffs())[times:])


def principal(series: acb_series, order: int) -> tuple[acb, ...]:
    """Return the coefficients of x^-1, x^-2, … x^-order of x^-order times a series."""
    return tuple(series[order - power] for power in range(1, order + 1))


def as_time_polynomial(parts: Sequence[acb]) -> list[acb]:
    """Return the coefficients in t of the residue of (sum of parts[l - 1] x^-l) e^(x t) at x = 0."""
    result, factorial = [], arb(1)
    for power, part in enumerate(parts):
        factorial = factorial * max(power, 1)
        result.append(part / factorial)
    return result
