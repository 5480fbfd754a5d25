"""What is exact in the first pieces of a delayed response: rational polynomials, and how the first one begins.

A term c_T of the method of steps (see `steps`) whose poles all lie at s = 0 is a polynomial in time with rational
coefficients. Where d0 is a power of s that holds for all of them, else perhaps for the first.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from flint import acb_poly, arb, fmpq, fmpq_poly

from specgate.delays.steps import Mode
from specgate.delays.transform import Transform
from specgate.systems.polynomials import order_at_origin
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

_MOST = 60
_HALVINGS = 60


def polynomials(transform: Transform, kinks: Sequence[fmpq]) -> tuple[fmpq_poly, ...]:
    """Return the pieces from the first kink on, each in the time from its kink, as long as they are polynomials."""
    found: list[fmpq_poly] = []
    terms: list[tuple[fmpq, fmpq_poly]] = []
    for time, term in zip(kinks[:_MOST], _terms(transform, kinks), strict=False):
        terms.append((time, term))
        total = fmpq_poly([0])
        for begin, polynomial in terms:
            total += polynomial(fmpq_poly([time - begin, 1]))
        found.append(total)
    return tuple(found)


def _terms(transform: Transform, kinks: Sequence[fmpq]) -> Iterator[fmpq_poly]:
    """Yield the terms in the time from their begin on, up to the first that is no polynomial."""
    driven = dict(transform.numerator.terms)
    base = transform.denominator.undelayed
    known: dict[fmpq, TransferFunction] = {}
    for time in kinks:
        total = TransferFunction(driven.get(time, fmpq_poly([0])), fmpq_poly([1]))
        for delay, polynomial in transform.denominator.delayed:
            if time - delay in known:
                before = known[time - delay]
                above = total.numerator * before.denominator - polynomial * before.numerator * total.denominator
                total = TransferFunction(above, total.denominator * before.denominator)
        found = known[time] = TransferFunction(total.numerator, total.denominator * base).reduced()
        power = order_at_origin(found.denominator)
        if found.denominator.degree() > power:
            return
        yield _in_time(found.numerator, power)


def _in_time(numerator: fmpq_poly, power: int) -> fmpq_poly:
    """Return the inverse transform of numerator / s^power."""
    result, factorial = [], fmpq(1)
    for order in range(power):
        factorial = factorial * max(order, 1)
        result.append(numerator[power - 1 - order] / factorial)
    return fmpq_poly(result)


def monotone_start(modes: Sequence[Mode], order: int, most: fmpq, bits: int) -> tuple[fmpq, int] | None:
    """Return a length over which a sum of modes moves strictly one way, and which way; None: not found.

    order: of the first derivative that is not zero at x = 0. All before it have the sign of this one for as long as it
    keeps its own. most: the length of the piece.
    """
    with working_precision(bits):
        raised = [(mode, _raised(mode, order)) for mode in modes]
        length = most
        for _ in range(_HALVINGS):
            x = arb(0).union(arb(length))
            value = arb(0)
            for mode, polynomial in raised:
                value += ((polynomial(x) * (mode.pole * x).exp()) * mode.weight).real
            if value > 0 or value < 0:
                return length, 1 if value > 0 else -1
            length = length / 2
    return None


def _raised(mode: Mode, order: int) -> acb_poly:
    """Return the polynomial of a derivative of a mode."""
    polynomial = mode.polynomials[0]
    for _ in range(order):
        polynomial = polynomial.derivative() + polynomial * mode.pole
    return polynomial
