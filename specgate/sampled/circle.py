"""Where the roots of a polynomial in z lie about the unit circle: exactly for exact coefficients, else in balls.

z = (1 + w)/(1 - w) takes the inside of the circle to the left half plane, z = 1 to 0 and z = -1 to infinity: the
polynomial in w has fewer roots than the one in z where z = -1 is a root.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import zip_longest

from flint import acb, acb_poly, arb, arb_poly, fmpq, fmpq_poly

from specgate.systems.polynomials import ONE
from specgate.systems.stability import is_hurwitz
from specgate.terms.precision import HIGHEST, working_precision

FIRST = 128
"""Bits at which a question about a polynomial in balls is first asked."""

Coefficients = Callable[[int], arb_poly]
"""From a precision in bits to a polynomial in balls of about that precision."""


def in_w(p: fmpq_poly) -> fmpq_poly:
    """Return (1 - w)^n p((1 + w)/(1 - w)), n being the degree of `p`."""
    above, below = fmpq_poly([1, 1]), fmpq_poly([1, -1])
    result, power = fmpq_poly(), ONE
    for coefficient in reversed(p.coeffs()):
        result, power = result * above + power * coefficient, power * below
    return result


def in_w_balls(p: arb_poly, bits: int) -> arb_poly:
    """Return the same for a polynomial in balls."""
    with working_precision(bits):
        above, below = arb_poly([1, 1]), arb_poly([1, -1])
        result, power = arb_poly([0]), arb_poly([1])
        for coefficient in reversed(p.coeffs()):
            result, power = result * above + power * arb_poly([coefficient]), power * below
        return result


def is_schur(p: fmpq_poly) -> bool:
    """Whether every root lies strictly inside the unit circle (a constant has none), exactly."""
    moved = in_w(p)
    return moved.degree() == p.degree() and is_hurwitz(moved)


def is_schur_in_balls(coefficients: Coefficients) -> bool | None:
    """Whether every root lies strictly inside the circle; None where the highest precision does not tell."""
    bits = FIRST
    while bits <= HIGHEST:
        found = schur_at(coefficients(bits), bits)
        if found is not None:
            return found
        bits *= 2
    return None


def in_w_padded(p: arb_poly, degree: int, bits: int) -> list[arb]:
    """Return the coefficients of (1 - w)^degree p((1 + w)/(1 - w)), lowest first, for any degree from that of p on."""
    with working_precision(bits):
        lifted = in_w_balls(p, bits) * arb_poly([1, -1]) ** (degree - max(p.degree(), 0))
    found = lifted.coeffs()
    return [*found, *([arb(0)] * (degree + 1 - len(found)))]


def schur_at(p: arb_poly, bits: int) -> bool | None:
    """Whether every root of every polynomial in a ball lies strictly inside (True), or not so for any (False)."""
    return is_hurwitz_in_balls(_padded(p, bits), bits)


def _padded(p: arb_poly, bits: int) -> list[arb]:
    """Return the coefficients in w, one more than the degree in z, lowest first."""
    found = in_w_balls(p, bits).coeffs()
    return [*found, *([arb(0)] * (p.degree() + 1 - len(found)))]


def is_hurwitz_in_balls(coefficients: Sequence[arb], bits: int) -> bool | None:
    """Routh's array from the low end, as for exact coefficients (systems.stability); None where a sign is not told.

    A pivot of the other sign is a root that is not on the left, whatever follows. A leading coefficient that may be
    zero is a root that may be at z = -1, and is met as the last pivot.
    """
    with working_precision(bits):
        if coefficients[0] < 0:
            coefficients = [-one for one in coefficients]
        elif not coefficients[0] > 0:
            return None
        if any(one < 0 for one in coefficients):
            return False
        a, b = list(coefficients[::2]), list(coefficients[1::2])
        for _ in range(len(coefficients) - 1):
            if b[0] < 0:
                return False
            if not b[0] > 0:
                return None
            ratio = a[0] / b[0]
            rest = [one - ratio * other for one, other in zip_longest(a, b, fillvalue=arb(0))][1:]
            a, b = b, rest or [arb(0)]
        return True


def roots_in_balls(p: arb_poly, bits: int) -> tuple[acb, ...] | None:
    """Return disjoint balls each of which holds one root, real ones exactly real; None where they are not told apart.

    The balls are certified by FLINT. The polynomial is real: a root whose ball meets its mirror image is its own
    conjugate, for another root would have to be in the same ball.
    """
    if p.degree() < 1:
        return ()
    with working_precision(bits):
        try:
            found = acb_poly(p).roots(tol=arb(fmpq(1, 1 << (bits // 2))), maxprec=2 * bits)
        except ValueError:
            return None
        return tuple(acb(root.real) if root.imag.contains(0) else root for root in found)
