"""How far a sampled response still goes from some sample on: bounds that are proved, for all times to come.

Let x be the deviation of the state from its rest, x[k + 1] = M x[k], and let what is looked at stay within
sqrt(x[k]' Q x[k]) during period k. With P = Q + M'QM + ... (N terms) it stays within sqrt(x[k]' P x[k]) for N periods.
If the row sums of |M^N| are at most 2^-64, then after every further N periods the state is smaller by that factor, and
x' P x is at most the sum of all |P[i, j]| times the square of its largest entry. The larger of both bounds holds for
good. P sums N = 2^n terms in n doublings. Stability is proved by the way: some power of M is small.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import acb, acb_mat, arb, arb_mat, fmpq

from specgate.sampled.states import States
from specgate.terms.precision import working_precision

_BITS = 256
_SMALL = arb(fmpq(1, 1 << 64))
_DOUBLINGS = 48


class Decay:
    """Bounds on what is looked at of a deviation from rest; `states` are those of the deviation at _BITS bits."""

    def __init__(self, states: States, quadratic: arb_mat) -> None:
        self._states = states
        self._ready = False
        self._terms = 0
        self._known: dict[int, arb] = {}
        with working_precision(_BITS):
            total = quadratic
            for exponent in range(_DOUBLINGS):
                power = states.power(exponent)
                total = total + power.transpose() * total * power
                if _row_sum(states.power(exponent + 1)) < _SMALL:
                    self._ready = True
                    self._terms = 2 << exponent
                    break
            self._form = total
            self._sum = sum((abs(entry) for entry in total.entries()), arb(0))

    def from_sample(self, index: int) -> arb | None:
        """Return a bound for all times from a sample on; None where the decay is not proved."""
        if not self._ready:
            return None
        if index not in self._known:
            state = self._states.far(index)
            with working_precision(_BITS):
                near = (state.transpose() * self._form * state).entries()[0]
                greatest = max((float(abs(entry).upper()) for entry in state.entries()), default=0.0)
                far = self._sum * (arb(greatest) * (1 + arb(fmpq(1, 1 << 40))) * _SMALL) ** 2
                self._known[index] = near.union(far).upper().sqrt().upper()
        return self._known[index]

    def integrals(self, index: int, period: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of what is looked at, and of its square, from a sample on.

        The squares of the greatest values of the next N periods add up to at most the square of the bound; so their sum
        is at most sqrt(N) times it (Cauchy), and what follows after every further N periods is 2^-64 of that.
        """
        bound = self.from_sample(index)
        if bound is None:
            return None
        with working_precision(_BITS):
            whole = 2 * bound * arb(self._terms).sqrt() * period
            square = 2 * bound * bound * period
        return whole.upper().fmpq(), square.upper().fmpq()

    def first_within(self, distance: fmpq) -> int | None:
        """Return a sample (not far from the first) from which on the bound is within a distance."""
        if not self._ready:
            return None
        high = 1
        while not self._within(high, distance):
            high *= 2
            if high > 1 << _DOUBLINGS:
                return None
        low = -1 if high == 1 else high // 2
        while high - low > 1:
            middle = (low + high) // 2
            low, high = (low, middle) if self._within(middle, distance) else (middle, high)
        return high

    def _within(self, index: int, distance: fmpq) -> bool:
        bound = self.from_sample(index)
        return bound is not None and bool(bound <= arb(distance))


def quadratic(rows: Sequence[tuple[acb, acb_mat, fmpq]], through: arb_mat) -> arb_mat:
    """Return Q with |y - rest|^2 <= x' Q x over one stretch, x being the state at the sample.

    rows: shapes t^j e^(pt) of the stretch with their weights over what `through` makes of the state, and its length. Of
    M terms the square of the sum is at most M times the sum of the squares; t^j |e^(pt)| is greatest at an end of the
    stretch or at t = j/|Re p|, and at most length^j max(1, e^(Re p length)) in any case.
    """
    with working_precision(_BITS):
        size = int(through.ncols())
        total, count = arb_mat(size, size), 0
        wide = acb_mat(through)
        for pole, weights, length in rows:
            growth = (pole.real * length).exp()
            most = growth if growth > 1 else growth.union(arb(1)).upper()
            for power, row in enumerate((weights * wide).tolist()):
                count += 1
                top = most * arb(length) ** power
                real = arb_mat(1, size, [entry.real * top for entry in row])
                imaginary = arb_mat(1, size, [entry.imag * top for entry in row])
                total = total + real.transpose() * real + imaginary.transpose() * imaginary
        return total * arb(max(count, 1))


def _row_sum(matrix: arb_mat) -> arb:
    sums = [sum((abs(entry) for entry in row), arb(0)) for row in matrix.tolist()]
    return max((one.upper() for one in sums), key=float, default=arb(0))
