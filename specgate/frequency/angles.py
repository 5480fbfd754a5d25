"""Whether an angle of algebraic numbers is exactly a rational multiple of pi: a phase margin of 45 deg.

Let the angle t have the cosine of its double c = cos 2t, algebraic. For a whole q the Chebyshev polynomial has
T_q(c) = cos 2qt, which is 1 if and only if t is a multiple of pi/q. So an angle that a ball puts within less than
pi/2q of p pi/q equals it if and only if T_q(c) = 1. For c = u/v at a root of f this is decided in Q[x]/(f).

A limit of 45 deg arrives as 45/180 of the decimal that stands for pi: the fraction is told from that.
"""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq

from specgate.frequency.spots import Sign
from specgate.terms.unit import PI, PRECISE_PI

Against = Callable[[fmpq], Sign | None]

_FINEST = 720
"""Greatest denominator of a multiple of pi that is looked at: quarters of a degree."""


def multiple_of_pi(limit: fmpq) -> tuple[fmpq, fmpq] | None:
    """Return the fraction of pi that a limit is, and the decimal for pi that it was made with; None for others."""
    for pi in (PI, PRECISE_PI):
        fraction = limit / pi
        if fraction.q <= _FINEST:
            return fraction, pi
    return None


def equals_where(chebyshev: Callable[[int], bool]) -> Against:
    """Return a predicate for an angle: 0 at a multiple of pi that it equals, None at all other limits.

    chebyshev: whether T_q(cos 2t) = 1; asked only for limits that a ball of 128 bits does not tell from the angle.
    """

    def against(limit: fmpq) -> Sign | None:
        found = multiple_of_pi(limit)
        return 0 if found is not None and chebyshev(int(found[0].q)) else None

    return against


def the_way_round(against: Against | None) -> Against:
    """Return the predicate for a whole turn minus an angle."""

    def other(limit: fmpq) -> Sign | None:
        found = multiple_of_pi(limit)
        return None if found is None or against is None else against(2 * found[1] - limit)

    return other
