"""How a response leaves its rest: the first derivative that is not zero, and how long it keeps its sign.

If y' to y^(m-1) are zero at the start of a piece and y^(m) has one sign on [0, h], then y moves strictly one way there.
The zeros are exact, for states at rest are exactly zero; y^(m) keeps its sign as long as h times a bound of |y^(m+1)|
is less than it.
"""

from __future__ import annotations

from flint import acb, acb_mat, arb, arb_mat, fmpq

from specgate.sampled.hulls import Terms, derived
from specgate.sampled.shapes import Shapes
from specgate.terms.precision import working_precision

_BITS = 128


def start(shapes: Shapes, state: arb_mat, length: fmpq) -> tuple[fmpq, int] | None:
    """Return a length over which a piece moves one way from its start on, and which way; None: not told, or at once.

    state: what moves and what is held at the start of the piece.
    """
    for order in range(1, shapes.slopes + 1):
        with working_precision(_BITS):
            value = (arb_mat(shapes.slope_row(order)) * state)[0, 0]
        if value.is_zero():
            continue
        if value.contains(0) or order == 1:
            return None
        return _kept(derived(shapes.rows(_BITS), order + 1), state, value, length)
    return None


def _kept(terms: Terms, state: arb_mat, value: arb, length: fmpq) -> tuple[fmpq, int] | None:
    with working_precision(_BITS):
        sizes = [(pole, [abs(c) for c in (weights * acb_mat(state)).entries()]) for pole, weights in terms]
        for _ in range(60):
            most = sum((_bound(pole, row, length) for pole, row in sizes), arb(0))
            if most * length < abs(value):
                return length, 1 if value > 0 else -1
            length = length / 2
    return None


def _bound(pole: acb, sizes: list[arb], length: fmpq) -> arb:
    growth = (pole.real * length).exp().union(arb(1)).upper()
    return sum((size * arb(length) ** j for j, size in enumerate(sizes)), arb(0)) * growth
