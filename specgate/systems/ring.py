"""Which roots of a polynomial lie in a ring about the origin, its edges included: decided exactly.

How many roots lie exactly on an edge |r| = R is counted in rational arithmetic: the circle becomes the imaginary axis
of x in r = R (1 + x)/(1 - x). Balls are refined until that many, and no more, are not clear of it.
"""

from __future__ import annotations

from flint import arb, fmpq, fmpq_poly

from specgate.systems.polynomials import order_at_origin
from specgate.systems.regions import circle_to_axis, each_once
from specgate.systems.roots import certified_roots
from specgate.systems.stability import classify
from specgate.terms.precision import HIGHEST, working_precision


def in_ring(p: fmpq_poly, low: fmpq, high: fmpq) -> tuple[bool, ...] | None:
    """Return of each root, in the order of `certified_roots`, whether low <= |r| <= high; None if not decided."""
    outside, inside = _distances(p, low), _distances(p, high)
    if outside is None or inside is None:
        return None
    return tuple(far >= 0 >= near for far, near in zip(outside, inside, strict=True))


def _distances(p: fmpq_poly, radius: fmpq) -> tuple[int, ...] | None:
    """Return the sign of |r| - radius for each root."""
    on_circle = _on_circle(each_once(p), radius)
    bits = 64
    while bits <= HIGHEST:
        with working_precision(bits):
            distances = [abs(root.value) - arb(radius) for root in certified_roots(p, bits)]
            signs = tuple(1 if d > 0 else -1 if d < 0 else 0 for d in distances)
        if signs.count(0) == on_circle:
            return signs
        bits *= 2
    return None


def _on_circle(p: fmpq_poly, radius: fmpq) -> int:
    """Count the roots on a circle, of a polynomial that has each root once."""
    if radius == 0:
        return order_at_origin(p)
    # the root at -radius goes to infinity
    return classify(circle_to_axis(p, radius)).axis + (p(-radius) == 0)
