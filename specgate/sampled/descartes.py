"""Positive roots of a real polynomial whose coefficients are balls, isolated without looking at any other root.

On (0, infinity) put x = t/(1 - t). With Bernstein coefficients b over a part of (0, 1), the number of roots inside,
counted with multiplicity, is at most the number of changes of sign in b, and equal to it where that is 0 or 1
(Descartes; de Casteljau's scheme gives the coefficients over both halves of a part). Signs that the balls leave open
are taken either way: a part is decided only if every choice gives 0, or every choice gives 1. Repeated roots elsewhere
in the plane, which many factors of one kind leave behind, do not disturb.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import pairwise
from math import comb

from flint import arb, arb_mat, arb_poly, fmpq

from specgate.terms.precision import working_precision

_CUTS = (fmpq(33, 64), fmpq(27, 64), fmpq(39, 64))
_SHALLOW = 24
_MOST = 300
_DEEPEST = 200

Part = tuple[fmpq, fmpq, bool]
"""An open interval, and whether it holds exactly one root."""


def positive_roots(p: arb_poly, bits: int) -> Sequence[arb] | None:
    """Return balls that hold one root each, in rising order; None where this precision does not tell them apart.

    Zero as a root is left out where the low coefficients are exactly zero.
    """
    found = isolated(p, bits)
    if found is None:
        return None
    with working_precision(bits):
        return [arb(left).union(arb(right)) for left, right, _ in found]


def isolated(p: arb_poly, bits: int) -> Sequence[Part] | None:
    """Return the same as exact intervals."""
    return _over_x(_isolated, p, bits)


def covered(p: arb_poly, bits: int) -> Sequence[Part] | None:
    """Return intervals outside of which no positive root is; None: too many.

    Other than for `isolated` a double root, or a pair that the balls do not tell apart, is no obstacle.
    """
    return _over_x(_covered, p, bits)


def _over_x(search: Callable[[list[arb]], Sequence[Part] | None], p: arb_poly, bits: int) -> Sequence[Part] | None:
    bernstein = _bernstein(p, bits)
    if not bernstein:
        return bernstein if bernstein is None else []
    with working_precision(bits):
        found = search(bernstein)
    return None if found is None else [(left / (1 - left), right / (1 - right), one) for left, right, one in found]


def _bernstein(p: arb_poly, bits: int) -> list[arb] | None:
    """Return the coefficients over the whole of (0, 1), none for a polynomial without roots; None: not told."""
    coefficients = p.coeffs()
    low = next((k for k, c in enumerate(coefficients) if not c.is_zero()), len(coefficients))
    rest = coefficients[low:]
    if len(rest) < 2:
        return []
    if rest[0].contains(0) or rest[-1].contains(0):
        return None
    degree = len(rest) - 1
    with working_precision(bits):
        return [c / comb(degree, k) for k, c in enumerate(rest)]


def _covered(bernstein: list[arb]) -> Sequence[Part] | None:
    found: list[Part] = []
    cuts = [_Cut(len(bernstein) - 1, part) for part in _CUTS]
    waiting, looked = [(fmpq(0), fmpq(1), bernstein, 0)], 0
    while waiting:
        left, right, b, depth = waiting.pop()
        looked += 1
        if looked > _MOST:
            return None
        least, most = _changes(b)
        inner = left > 0 and right < 1
        if most == 0:
            continue
        if inner and (least == most == 1 or depth >= _SHALLOW):
            found.append((left, right, least == most == 1))
            continue
        halves = ((cut, *cut.halves(b)) for cut in cuts)
        told = next(((cut.part, before, after) for cut, before, after in halves if not before[-1].contains(0)), None)
        if told is None:
            if not inner:
                return None
            found.append((left, right, False))
            continue
        part, before, after = told
        cut = left + (right - left) * part
        waiting += [(cut, right, after, depth + 1), (left, cut, before, depth + 1)]
    return found


def _isolated(bernstein: list[arb]) -> Sequence[Part] | None:
    found: list[Part] = []
    cut_in_two = _Cut(len(bernstein) - 1, _CUTS[0])
    waiting = [(fmpq(0), fmpq(1), bernstein, 0)]
    while waiting:
        left, right, b, depth = waiting.pop()
        least, most = _changes(b)
        if most == 0:
            continue
        # a root is neither 0 nor infinite, so that cutting on leads away from the ends
        if least == most == 1 and left > 0 and right < 1:
            found.append((left, right, True))
            continue
        if depth == _DEEPEST:
            return None
        cut = left + (right - left) * _CUTS[0]
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

    def __init__(self, degree: int, at: fmpq) -> None:
        self.part, part = at, arb(at)
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
