"""On which side of its rest a sampled response stays for good, where one real mode outlasts the others.

Let z1 > 0 be a simple mode larger than all others in magnitude and P the projection on it, P = adj(z1 I - M)/chi'(z1).
From a sample on the deviation is z1^k (P x[0] + M'^k (I - P) x[0]) with M' = (M - z1 P)/z1, whose powers vanish. What
the first term is over a period is the same for all k but for the factor z1^k. If it keeps one sign there, at least at
a distance d from zero, and from sample k on the second is within less than d for good, that sign is the lasting one.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence

from flint import arb, arb_mat, arb_poly, fmpq

from specgate.response.modes import Expansion
from specgate.sampled.circle import roots_in_balls
from specgate.sampled.decay import Decay
from specgate.sampled.states import States
from specgate.terms.precision import working_precision

_CUTS = 9

Stretched = tuple[Callable[[arb_mat], Expansion], fmpq]
"""From a deviation at the sample to what it is over a stretch, and how long that is."""


def slowest(matrix: arb_mat, bits: int) -> arb | None:
    """Return the mode that outlasts all others, if there is one and it is real and positive."""
    with working_precision(bits):
        characteristic = matrix.charpoly()
    roots = roots_in_balls(characteristic, bits)
    if not roots:
        return None
    with working_precision(bits):
        first = max(roots, key=lambda root: float(abs(root).mid()))
        others = [root for root in roots if root is not first]
        real = first.imag.is_zero() and first.real > 0
        return first.real if real and all(abs(other) < first.real for other in others) else None


def projection(matrix: arb_mat, mode: arb, bits: int) -> arb_mat:
    """Return the projection on a simple mode: adj(zI - M) is the sum of z^k B[k], B[k-1] = M B[k] + a[k] I."""
    size = int(matrix.nrows())
    with working_precision(bits):
        characteristic: arb_poly = matrix.charpoly()
        unit = arb_mat(size, size, [int(i % (size + 1) == 0) for i in range(size * size)])
        term, power = unit, mode ** (size - 1)
        total = unit * power
        for k in range(size - 1, 0, -1):
            term = matrix * term + unit * characteristic[k]
            power = mode ** (k - 1)
            total = total + term * power
        return total * (1 / characteristic.derivative()(mode))


def side(
    matrix: arb_mat, first: arb_mat, form: arb_mat, ways: Sequence[Stretched], bits: int
) -> tuple[int, int] | None:
    """Return the lasting sign and a sample from which on it holds; None where it is not told.

    first: the deviation at the first sample. form: as for `Decay`. ways: the deviation over each stretch, from one at
    the sample.
    """
    mode = slowest(matrix, bits)
    if mode is None:
        return None
    part = projection(matrix, mode, bits)
    with working_precision(bits):
        lasting = part * first
        rest = (matrix - part * mode) * (1 / mode)
        found = [_one_side(make(lasting), length) for make, length in ways]
    if not found or any(one is None for one in found):
        return None
    signs = {sign for sign, _ in filter(None, found)}
    if len(signs) > 1:
        return None
    distance = min(distance for _, distance in filter(None, found))
    sample = Decay(States(rest, first - lasting, bits), form).first_within(distance / 2)
    return None if sample is None else (signs.pop(), sample)


def _one_side(expansion: Expansion, length: fmpq) -> tuple[int, fmpq] | None:
    """Return the sign of a function over [0, length] and a distance that it keeps from zero; None where not told."""
    least: arb | None = None
    signs: set[int] = set()
    waiting = [(fmpq(0), length, 0)]
    while waiting:
        left, right, depth = waiting.pop()
        with working_precision(expansion.bits):
            value = expansion.deviation(arb(left).union(arb(right)))[0]
            if not value.contains(0):
                signs.add(1 if value > 0 else -1)
                low = abs(value).lower()
                least = low if least is None else least.min(low)
                continue
        if depth == _CUTS:
            return None
        middle = (left + right) / 2
        waiting += [(left, middle, depth + 1), (middle, right, depth + 1)]
    if len(signs) != 1 or least is None or not least > 0:
        return None
    return signs.pop(), least.lower().fmpq()
