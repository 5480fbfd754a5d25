"""Roots of exact polynomials as balls that are proved to contain them."""

from __future__ import annotations

from collections.abc import Iterable
from functools import lru_cache
from typing import cast

from flint import acb, arb, fmpq, fmpq_poly, fmpz_poly

from specgate.systems.polynomials import distinct_roots_times, primitive
from specgate.systems.stability import classify, is_hurwitz
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_ORDERED_AT = 160
"""Bits of the first computation, by which roots are ordered: those that a response asks for first, with its guard."""


@record
class Root:
    """A root and how often it occurs. Parts that are exactly zero are exactly zero in `value`."""

    value: acb
    multiplicity: int


def certified_roots(p: fmpq_poly, bits: int) -> tuple[Root, ...]:
    """Return every root of `p` once, both of a conjugate pair, in balls of at least `bits` relative bits.

    Balls of different roots are disjoint. Real roots have an imaginary part of exactly zero, roots on the imaginary
    axis a real part of exactly zero. Sorted by real, then imaginary part; a root keeps its index at every precision.
    Raises ValueError for the zero polynomial.
    """
    if not p:
        raise ValueError("every number is a root of zero")
    coefficients = tuple(int(c) for c in primitive(p).coeffs())
    return _at_precision(coefficients, max(bits, _ORDERED_AT))


@lru_cache(maxsize=256)
def _at_precision(coefficients: tuple[int, ...], bits: int) -> tuple[Root, ...]:
    found = _unordered(coefficients, bits)
    if bits == _ORDERED_AT:
        return tuple(_sorted(found))
    before = _at_precision(coefficients, _ORDERED_AT)
    return tuple(next(root for root in found if root.value.overlaps(known.value)) for known in before)


def _unordered(coefficients: tuple[int, ...], bits: int) -> list[Root]:
    factors = distinct_roots_times(fmpq_poly(fmpz_poly(list(coefficients))))
    return [Root(value, multiplicity) for factor, multiplicity in factors for value in _simple_roots(factor, bits)]


def _simple_roots(p: fmpq_poly, bits: int) -> list[acb]:
    """Return the roots of a square-free polynomial, those on the axis (their number is known) put exactly on it."""
    # Routh's array is a tenth of the price of counting, and most polynomials that are asked about are stable
    on_axis = 0 if is_hurwitz(p) else classify(p).axis
    while True:
        with working_precision(bits):
            # FLINT returns pairs with a multiplicity, its type stubs say otherwise.
            roots = [root for root, _ in cast("list[tuple[acb, int]]", p.complex_roots())]
        near = [root for root in roots if root.real.contains(0)]
        if len(near) == on_axis:
            return [acb(0, root.imag) if root.real.contains(0) else root for root in roots]
        bits *= 2


def _sorted(roots: Iterable[Root]) -> list[Root]:
    """Sort by real, then imaginary part; real parts that cannot be told apart count as equal."""
    by_real = sorted(roots, key=lambda root: (_middle(root.value.real), _middle(root.value.imag)))
    result: list[Root] = []
    group: list[Root] = []
    for root in by_real:
        if group and not group[-1].value.real.overlaps(root.value.real):
            result += sorted(group, key=lambda root: _middle(root.value.imag))
            group = []
        group.append(root)
    return result + sorted(group, key=lambda root: _middle(root.value.imag))


def _middle(x: arb) -> fmpq:
    """Return the midpoint of a ball, a number that sorts exactly."""
    return x.mid().fmpq()
