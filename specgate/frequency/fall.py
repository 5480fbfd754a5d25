"""The first frequency at which a gain falls by a fixed irrational factor, without rounding the factor.

Let h(x) = above/below over its value at 0, and c = 10^(-3/10) the square of the factor. For rationals c1 < c < c2 < 1:
h is continuous from h(0) = 1 on (poles are only passed above every level), so it falls to c2, if ever, no later than to
c, and to c no later than to c1: the first zero of h - c lies between the first zeros of h - c2 and h - c1. If h never
falls to c2, it never falls to c. Where the slope does not vanish between the two, they hold one simple zero, which
interval Newton encloses; c is a ball there, as narrow as is asked for.
"""

from __future__ import annotations

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.newton import Zero
from specgate.frequency.spots import positive_roots
from specgate.response.answers import Answer, Fragile
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

_PRECISIONS = (64, 128, 256, 512, 1024)

_TOUCHES = "the gain touches the level of -3 dB, as far as can be told, without falling through it for certain"


def first_fall(above: fmpq_poly, below: fmpq_poly) -> Answer:
    """Return the first x > 0 at which above/below is 10^(-3/10) of its value at x = 0, which is finite and not zero."""
    start, level = above * below[0], below * above[0]
    hull: arb | None = None
    for bits in _PRECISIONS:
        factor = square_of_factor(bits)
        low, high = factor.lower().fmpq(), factor.upper().fmpq()
        early = positive_roots(start - level * high)
        if not early:
            return Answer.nothing("the gain never falls 3 dB below that at zero frequency")
        late = positive_roots(start - level * low)
        if late:
            with working_precision(bits + 16):
                hull = early[0].enclose(bits).union(late[0].enclose(bits))
            zero = _simple(start, level, hull, bits)
            if zero is not None:
                return Answer(Proof.ENCLOSED, refine=zero.enclose)
    if hull is None:
        return Answer.undecided(_TOUCHES)
    found = hull
    return Answer(Proof.ENCLOSED, refine=lambda _: found, fragile=Fragile("the gain stays near -3 dB for a while"))


def square_of_factor(bits: int) -> arb:
    """Return a ball of 10^(-3/10)."""
    with working_precision(bits):
        return arb(10) ** arb(fmpq(-3, 10))


def _simple(start: fmpq_poly, level: fmpq_poly, hull: arb, bits: int) -> Zero | None:
    """Return the zero of start - c level in a hull that holds it, if its slope does not vanish there."""
    pair, slopes = (start, level), (start.derivative(), level.derivative())
    slope = _difference(slopes, hull, bits)
    if slope.contains(0):
        return None
    return Zero(
        lambda x, precision: _difference(pair, x, precision),
        lambda x, precision: _difference(slopes, x, precision),
        hull,
        rising=bool(slope > 0),
    )


def _difference(pair: tuple[fmpq_poly, fmpq_poly], x: arb, bits: int) -> arb:
    factor = square_of_factor(bits)
    with working_precision(bits):
        first, second = (p.numer()(x) / p.denom() for p in pair)
        return first - factor * second
