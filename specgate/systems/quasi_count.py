"""How many roots of a quasi-polynomial lie right of a vertical line, by the change of its argument: proved.

Let D(s) = d0(s) + sum of dk(s) e^(-tk s), deg d0 = n not below the others, without a root on Re s = g, and let d0
exceed the sum of the others in magnitude on that line beyond the height W. Then R = D/d0 - 1 is less than 1 there, and
so it is for Re s >= g and |s| large (its terms fall, or the sum of their limits is below 1 on the line and falls to
the right). Round the part of the half plane right of the line within a large circle the argument of D grows by 2 pi
times N(D), its roots there (argument principle), and that of d0 by 2 pi N(d0), roots on the line left out. On the
circle and on the line beyond W the two differ by the argument of 1 + R, which stays within a right angle: it
contributes what it is at both ends, g + j W and g - j W. On the rest of the line D is conjugate to itself. Hence

    N(D) = N(d0) + (growth of arg d0 on [0, W] - growth of arg D on [0, W] + arg(1 + R(W))) / pi.

On [0, W] the line is cut into cells, each with a disc about D(middle) that holds D and not zero: within a cell the
argument grows by the principal argument of D(end)/D(start).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from flint import acb, acb_poly, arb, fmpq, fmpq_poly

from specgate.systems.quasi import Quasi
from specgate.systems.roots import certified_roots
from specgate.terms.precision import working_precision
from specgate.terms.records import record

MOST_CELLS = 20000
"""Cells beyond which a count is given up."""

_AXIS = fmpq(0)


@record
class Cell:
    """A part [start, end] of the upper half of a line, heights in rad/s; `least`: |D| is not below it there."""

    start: fmpq
    end: fmpq
    least: arb


@record
class Line:
    """What was found along the upper half of Re s = real.

    count: roots right of it. cells: of [0, height]; beyond it the undelayed term of D exceeds the others together.
    """

    real: fmpq
    count: int
    height: fmpq
    cells: tuple[Cell, ...]


class Evaluated:
    """A quasi-polynomial as a function of balls; one for each working precision."""

    def __init__(self, quasi: Quasi) -> None:
        self._terms = [(arb(delay), acb_poly(polynomial)) for delay, polynomial in quasi.terms]
        self._slopes = [
            (arb(delay), acb_poly(polynomial.derivative() - polynomial * delay)) for delay, polynomial in quasi.terms
        ]

    def value(self, s: acb) -> acb:
        """Return a ball of D(s)."""
        return _sum(self._terms, s)

    def slope(self, s: acb) -> acb:
        """Return a ball of D'(s)."""
        return _sum(self._slopes, s)


def _sum(terms: Sequence[tuple[arb, acb_poly]], s: acb) -> acb:
    total = acb(0)
    for delay, polynomial in terms:
        value = polynomial(s)
        total += value if delay.is_zero() else value * (-s * delay).exp()
    return total


def line(quasi: Quasi, real: fmpq, bits: int = 64) -> Line | None:
    """Count the roots right of Re s = real; None where it was not decided (a root is too near, or too many cells).

    `quasi` needs an undelayed term whose degree no other exceeds; where others reach it, the sum of their leading
    coefficients, each times e^(-real delay), must be less than its own: else None.
    """
    height = dominated_beyond(quasi, real)
    if height is None:
        return None
    with working_precision(bits):
        function = Evaluated(quasi)
        cells: list[Cell] = []
        growth = arb(0)
        for cell, change in walk(function, real, fmpq(0), height, bits):
            cells.append(cell)
            growth += change
        if (cells[-1].end if cells else 0) != height:
            return None
        of_base, right = _growth(quasi.undelayed, real, height)
        end = acb(real, height)
        last = (function.value(end) / acb_poly(quasi.undelayed)(end)).arg()
        total = right + (of_base - growth + last) / arb.pi()
        count = total.unique_fmpz()
    return None if count is None else Line(real, int(count), height, tuple(cells))


def dominated_beyond(quasi: Quasi, real: fmpq) -> fmpq | None:
    """Return a height (rad/s) from which on the undelayed term exceeds the others together on Re s = real.

    None where it does not exceed them at infinity.
    """
    return exceeding_beyond(quasi.undelayed, quasi.delayed, real)


def exceeding_beyond(first: fmpq_poly, terms: Sequence[tuple[fmpq, fmpq_poly]], real: fmpq) -> fmpq | None:
    """Return a height from which on a polynomial exceeds the sum of the magnitudes of delayed terms on Re s = real.

    With weights wk the square of sum |dk| is at most (sum wk) (sum |dk|^2 / wk) (Cauchy): the difference is an exact
    polynomial in the square of the height. None where the polynomial does not exceed the terms at infinity.
    """
    base = squared(first, real)
    degree = first.degree()
    rest = [(_grown(real, delay), polynomial) for delay, polynomial in terms]
    if any(polynomial.degree() > degree for _, polynomial in rest):
        return None
    leads = [factor * abs(polynomial[degree]) for factor, polynomial in rest]
    spare = (abs(first[degree]) - sum(leads, fmpq(0))) / (len(rest) + 1)
    if spare <= 0:
        return None
    weights = [lead + spare for lead in leads]
    total = fmpq_poly()
    for weight, (factor, polynomial) in zip(weights, rest, strict=True):
        total += squared(polynomial, real) * (factor * factor / weight)
    return beyond_last_root(base - total * sum(weights, fmpq(0)))


def beyond_last_root(polynomial: fmpq_poly) -> fmpq:
    """Return a height from which on a polynomial in its square has no root. Raises ValueError for zero."""
    roots = [root.value.real for root in certified_roots(polynomial, 64) if root.value.imag.is_zero()]
    highest = max((_above(root) for root in roots if not root < 0), default=fmpq(0))
    if highest == 0:
        return fmpq(0)
    with working_precision(64):
        # Strictly beyond the last root.
        return _above(arb(highest).sqrt()) * fmpq(65, 64)


def _grown(real: fmpq, delay: fmpq) -> fmpq:
    """Return a rational that |e^(-delay s)| does not exceed on Re s >= real."""
    if real == 0:
        return fmpq(1)
    with working_precision(64):
        return _above((arb(-real) * arb(delay)).exp())


def _above(ball: arb) -> fmpq:
    return ball.upper().fmpq()


def squared(polynomial: fmpq_poly, real: fmpq = _AXIS) -> fmpq_poly:
    """Return |p(real + j w)|^2 as a polynomial in w^2."""
    shifted = polynomial(fmpq_poly([real, 1]))
    mirrored = shifted(fmpq_poly([0, -1]))
    product = shifted * mirrored
    return fmpq_poly([c if power % 2 == 0 else -c for power, c in enumerate(product.coeffs()[::2])])


def _growth(polynomial: fmpq_poly, real: fmpq, height: fmpq) -> tuple[arb, int]:
    """Return how far the argument of a polynomial grows on [0, height], roots on the line passed on the right.

    Beside it the number of roots to the right, with those on the line counted as left. By each root p the argument of
    (s - p) at the height is taken in (-pi/2, pi/2] for roots on the left and in [pi/2, 3 pi/2) for those on the right;
    over conjugates the arguments at height 0 sum to 0 on the left and 2 pi a pair (pi, if real) on the right.
    """
    shifted = polynomial(fmpq_poly([real, 1]))
    total, right = arb(0), 0
    for root in certified_roots(shifted, 64):
        step = acb(0, height) - root.value
        if root.value.real > 0:
            right += root.multiplicity
            total += (-step).arg() * root.multiplicity
        elif root.value.real.is_zero():
            total += (arb.pi() / 2 if step.imag > 0 else -arb.pi() / 2) * root.multiplicity
        else:
            total += step.arg() * root.multiplicity
    return total, right


def walk(function: Evaluated, real: fmpq, low: fmpq, height: fmpq, bits: int) -> Iterator[tuple[Cell, arb]]:
    """Yield cells of [low, height] from below, with the growth of the argument over each; ends early if it gets stuck.

    bits: the precision that is set.
    """
    start, width, count = low, height - low, 0
    at_start = function.value(acb(real, low))
    narrowest = height / 2 ** (bits - 8)
    while start < height:
        end = min(start + width, height)
        middle, half = (start + end) / 2, (end - start) / 2
        ball = acb(real, arb(middle, half))
        centre = function.value(acb(real, middle))
        reach = abs(function.slope(ball)) * arb(half)
        count += 1
        if count > MOST_CELLS:
            return
        # Well clear of zero, so that the argument stays clear of pi as well.
        if 4 * reach < 3 * abs(centre):
            at_end = function.value(acb(real, end))
            yield Cell(start, end, abs(centre) - reach), (at_end / at_start).arg()
            start, at_start = end, at_end
            width = 2 * width
        else:
            width = (end - start) / 2
            if width < narrowest:
                return
