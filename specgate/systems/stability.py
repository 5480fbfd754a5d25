"""Where the roots of a polynomial lie: left or right of the imaginary axis, on it, at the origin. No root is computed.

Everything here is decided in whole numbers, whatever the multiplicities and however close a root is to the axis.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from flint import fmpq_poly

from specgate.systems.polynomials import distinct_roots_times, order_at_origin, primitive
from specgate.terms.records import record


@record
class RootCount:
    """Numbers of roots, each counted with its multiplicity.

    axis includes origin. axis_multiplicities: one number for each distinct root on the axis (both of a pair),
    greatest first.
    """

    left: int
    right: int
    axis: int
    origin: int
    axis_multiplicities: tuple[int, ...] = ()

    @property
    def stable(self) -> bool:
        """Whether every root lies strictly left of the imaginary axis."""
        return self.right == 0 and self.axis == 0


def is_hurwitz(p: fmpq_poly) -> bool:
    """Whether every root lies strictly left of the axis (a constant has none). Raises ValueError for zero.

    Routh's array on the even and the odd part, from the low end: all its pivots have one sign. (Routh 1877; the
    reversed polynomial has its roots on the same sides.)
    """
    if not p:
        raise ValueError("every number is a root of zero")
    whole = primitive(p)
    if whole.leading_coefficient() < 0:
        whole = -whole
    if any(coefficient <= 0 for coefficient in whole.coeffs()):
        return False
    a, b = type(whole)(whole.coeffs()[::2]), type(whole)(whole.coeffs()[1::2])
    for _ in range(whole.degree()):
        if b[0] <= 0:
            return False
        rest = (a * b[0] - b * a[0]).right_shift(1)
        content = rest.content()
        a, b = b, rest // content if content else rest
    return True


def classify(p: fmpq_poly) -> RootCount:
    """Count the roots by side. Raises ValueError for zero.

    With n = deg p and (-j)^n p(jw) = A(w) + j B(w), left minus right is the variation gained by Sturm's chain of A
    and B from minus to plus infinity (Gantmacher 1959, chapter XV); the roots on the axis are the real roots of its
    last member.
    """
    if not p:
        raise ValueError("every number is a root of zero")
    chain = _sturm_chain(*_along_the_axis(p))
    excess = _variations(chain, 1) - _variations(chain, -1)
    multiplicities = tuple(sorted(_real_multiplicities(chain[-1]), reverse=True))
    off_axis = p.degree() - sum(multiplicities)
    return RootCount(
        left=(off_axis + excess) // 2,
        right=(off_axis - excess) // 2,
        axis=sum(multiplicities),
        origin=order_at_origin(p),
        axis_multiplicities=multiplicities,
    )


def count_real_roots(p: fmpq_poly) -> int:
    """Return the number of distinct real roots (Sturm). Raises ValueError for zero."""
    if not p:
        raise ValueError("every number is a root of zero")
    chain = _sturm_chain(p, p.derivative())
    return _variations(chain, -1) - _variations(chain, 1)


def count_positive_roots(p: fmpq_poly) -> int:
    """Return the number of distinct real roots above zero. Raises ValueError for zero."""
    even = p.right_shift(order_at_origin(p))
    squared = fmpq_poly([c for coefficient in even.coeffs() for c in (coefficient, 0)][:-1])
    return count_real_roots(squared) // 2


def _along_the_axis(p: fmpq_poly) -> tuple[fmpq_poly, fmpq_poly]:
    """Return A and B of (-j)^n p(jw) = A(w) + j B(w); deg A = n > deg B."""
    real = [1, 0, -1, 0]
    imaginary = [0, -1, 0, 1]
    n = p.degree()
    a = [coefficient * real[(n - power) % 4] for power, coefficient in enumerate(p.coeffs())]
    b = [coefficient * imaginary[(n - power) % 4] for power, coefficient in enumerate(p.coeffs())]
    return fmpq_poly(a), fmpq_poly(b)


def _sturm_chain(first: fmpq_poly, second: fmpq_poly) -> list[fmpq_poly]:
    chain = [fmpq_poly(primitive(first))]
    following = fmpq_poly(primitive(second))
    while following:
        chain.append(following)
        following = fmpq_poly(primitive(-(chain[-2] % chain[-1])))
    return chain


def _variations(chain: list[fmpq_poly], end: int) -> int:
    """Return the number of changes of sign along the chain at plus (end 1) or minus (end -1) infinity."""
    signs = [(p.leading_coefficient() > 0) ^ (end < 0 and p.degree() % 2 == 1) for p in chain]
    return sum(before != after for before, after in pairwise(signs))


def _real_multiplicities(p: fmpq_poly) -> Iterator[int]:
    for factor, multiplicity in distinct_roots_times(p):
        yield from [multiplicity] * count_real_roots(factor)
