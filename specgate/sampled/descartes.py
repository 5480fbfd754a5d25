"""Positive roots of a real polynomial whose coefficients are balls, isolated without looking at any other root.

On (0, infinity) put x = t/(1 - t). With Bernstein coefficients b over a part of (0, 1), the number of roots inside,
counted with multiplicity, is at most the number of changes of sign in b, and equal to it where that is 0 or 1
(Descartes; de Casteljau's scheme gives the coefficients over both halves of a part). Signs that the balls leave open
are taken either way: a part is decided only if every choice gives 0, or every choice gives 1. Repeated roots elsewhere
in the plane, which many factors of one kind leave behind, do not disturb.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from math import comb

from flint import arb, arb_mat, arb_poly, fmpq

from specgate.terms.precision import working_precision

_CUT = fmpq(33, 64)
_DEEPEST = 200


def positive_roots(p: arb_poly, bits: int) -> Sequence[arb] | None:
    """Return balls that hold one root each, in rising order; None where this precision does not tell them apart.

    Zero as a root is left out where the low coefficients are exactly zero.
    """
    coefficients = p.coeffs()
    low = next((k for k, c in enumerate(coefficients) if not c.is_zero()), len(coefficients))
    rest = coefficients[low:]
    if len(rest) < 2:
        return []
    if rest[0].contains(0) or rest[-1].contains(0):
        return None
    degree = len(rest) - 1
    with working_precision(bits):
        return _isolated([c / comb(degree, k) for k, c in enumerate(rest)])


def _isolated(bernstein: list[arb]) -> Sequence[arb] | None:
    found: list[arb] = []
    cut_in_two = _Cut(len(bernstein) - 1)
    waiting = [(fmpq(0), fmpq(1), bernstein, 0)]
    while waiting:
        left, right, b, depth = waiting.pop()
        least, most = _changes(b)
        if most == 0:
            continue
        # a root is neither 0 nor infinite, so that cutting on leads away from the ends
        if least == most == 1 and left > 0 and right < 1:
            found.append(_between(left, right))
            continue
        if depth == _DEEPEST:
            return None
        cut = left + (right - left) * _CUT
        before, after = cut_in_two.halves(b)
        if before[-1].contains(0):
            return None
        waiting += [(cut, right, after, depth + 1), (left, cut, before, depth + 1)]
    return found


def _changes(b: Sequence[arb]) -> tuple[int, int]:
    """Return the least and the greatest number of changes of sign that the balls leave possible."""
    unreachable = 1 << 30
    best: dict[int, tuple[int, int]] = {}
    for c in b:
        signs = (1,) if c > 0 else (-1,) if c < 0 else () if c.is_zero() else (1, -1)
        if not signs:
            continue
        if not best:
            best = dict.fromkeys(signs, (0, 0))
            continue
        new = {}
        for sign in signs:
            ways = [(low + (sign != before), high + (sign != before)) for before, (low, high) in best.items()]
            new[sign] = (min((w[0] for w in ways), default=unreachable), max(w[1] for w in ways))
        best = new
    return min(low for low, _ in best.values()), max(high for _, high in best.values())


class _Cut:
    """The cut of a part in two, as one matrix for all polynomials of a degree.

    de Casteljau's scheme forms convex mixtures: row i is C(i, j) (1 - c)^(i - j) c^j; those of the right half are the
    same from the other end.
    """

    def __init__(self, degree: int) -> None:
        part = arb(_CUT)
        rest, row = 1 - part, [arb(1)]
        left = [row]
        for _ in range(degree):
            row = [rest * row[0], *(rest * one + part * other for other, one in pairwise(row)), part * row[-1]]
            left.append(row)
        zero = arb(0)
        before = [[*row, *([zero] * (degree + 1 - len(row)))] for row in left]
        after = [[*([zero] * (degree + 1 - len(row))), *row] for row in reversed(left)]
        self._matrix = arb_mat([*before, *after])

    def halves(self, b: Sequence[arb]) -> tuple[list[arb], list[arb]]:
        """Return the coefficients left and right of the cut."""
        found = (self._matrix * arb_mat(len(b), 1, b)).entries()
        return found[: len(b)], found[len(b) :]


def _between(left: fmpq, right: fmpq) -> arb:
    """Return a ball over x = t/(1 - t) between two places in (0, 1)."""
    return arb(left / (1 - left)).union(arb(right / (1 - right)))
