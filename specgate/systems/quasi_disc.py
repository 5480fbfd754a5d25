"""How many roots a quasi-polynomial has in a disc about the origin, by the change of its argument: proved.

It is entire and real on the real axis, so that its argument grows by pi times the number of its roots inside along the
upper half of the circle (argument principle). The half circle is cut into arcs, each with a disc about the value in its
middle that holds all values on the arc and not zero: along it the argument grows by the principal argument of the
value at its end over that at its start.
"""

from __future__ import annotations

from flint import acb, arb, fmpq

from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import MOST_CELLS, Evaluated
from specgate.terms.precision import working_precision

_NARROWEST = fmpq(1, 2**40)


def roots_within(quasi: Quasi, radius: fmpq, bits: int = 64) -> int | None:
    """Return the number of roots with |s| < radius, with multiplicity; None where one is too near the circle."""
    with working_precision(bits):
        growth = _growth(Evaluated(quasi), radius)
        count = None if growth is None else (growth / arb.pi()).unique_fmpz()
    return None if count is None else int(count)


def _growth(function: Evaluated, radius: fmpq) -> arb | None:
    """Return the growth of the argument along the upper half circle, from the positive real axis on."""
    start, width, total = fmpq(0), fmpq(1, 8), arb(0)
    at_start = function.value(_at(radius, arb(0)))
    for _ in range(MOST_CELLS):
        if start == 1:
            return total
        end = min(start + width, fmpq(1))
        middle, half = (start + end) / 2, (end - start) / 2
        centre = function.value(_at(radius, arb(middle)))
        reach = abs(function.slope(_at(radius, arb(middle, half)))) * arb.pi() * radius * half
        # Well clear of zero, so that the argument stays clear of pi as well.
        if 4 * reach < 3 * abs(centre):
            at_end = function.value(_at(radius, arb(end)))
            total += (at_end / at_start).arg()
            start, at_start, width = end, at_end, 2 * width
        else:
            width = half
            if width < _NARROWEST:
                return None
    return None


def _at(radius: fmpq, turn: arb) -> acb:
    """Return the point of the circle after a part of a half turn."""
    return (acb(0, 1) * (arb.pi() * turn)).exp() * arb(radius)
