"""One minus a cosine on an input of a sampled loop: its frequency, 2 pi over a rational time, is not rational.

While it acts, z' = A z + e size (1 - cos w t) with rational A and e. Its constant part is a state of the drive, whose
column of A is e. What the cosine does is the real part of -size X e^(iwt) with (iw I - A) X = e. There is always such
an X: the eigenvalues of A are algebraic and iw is not (Lindemann 1882). So z less that swing moves as if the constant
part acted alone. Samplers see the whole input at once: at a sample the state of the drive has its value there. After
its duration that state is set to zero, and nothing of the swing is left.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from flint import acb, acb_mat, arb, arb_mat, fmpq, fmpq_mat

from specgate.response.inputs import Bump
from specgate.response.modes import Mode
from specgate.sampled.state_space import Row
from specgate.terms.precision import working_precision


class Swings:
    """What some inputs of that kind do to z' = a z + …, y = c z + …; bumps: the place of each in z."""

    def __init__(self, a: fmpq_mat, c: Row, bumps: Sequence[tuple[int, Bump]]) -> None:
        self._a = a
        self._c = c
        self._bumps = tuple(bumps)
        self._found: dict[tuple[int, int], acb_mat] = {}

    def acting(self, start: fmpq) -> list[tuple[int, Bump]]:
        """Return those that act on a piece from its start on."""
        return [(place, one) for place, one in self._bumps if one.begin <= start < one.begin + one.period]

    def level(self, moving: arb_mat, start: fmpq) -> None:
        """Set the constant parts that act on a piece."""
        for place, one in self.acting(start):
            moving[place, 0] = arb(one.size)

    def sample(self, state: arb_mat, time: fmpq) -> None:
        """Set the whole inputs as a sample sees them, at the precision that is set."""
        for place, one in self.acting(time):
            turned = 2 * (time - one.begin) / one.period
            state[place, 0] = one.size * (1 - arb.cos_pi_fmpq(turned))

    def moved(self, start: fmpq, time: fmpq, bits: int) -> arb_mat:
        """Return by how much those that act on a piece have z swung at a time in it, or at its end."""
        total = arb_mat(int(self._a.nrows()), 1)
        for place, one in self.acting(start):
            way = self._way(place, one, bits)
            with working_precision(bits):
                turned = _turned(one, time)
                total = total + arb_mat(int(way.nrows()), 1, [(entry * turned).real for entry in way.entries()])
        return total

    def modes(self, start: fmpq, bits: int) -> Iterator[Mode]:
        """Yield what y swings by on a piece from its start on."""
        for place, one in self.acting(start):
            way = self._way(place, one, bits)
            with working_precision(bits):
                seen = sum((entry * c for c, entry in zip(self._c, way.entries(), strict=True)), acb(0))
                # the direct way, too, has the cosine in it: c[place] reads the constant part alone
                factor = (seen - one.size * self._c[place]) * _turned(one, start)
                yield Mode(acb(0, 2 * arb.pi() / one.period), (factor,))

    def speed(self, start: fmpq) -> float:
        """Return how fast those that act on a piece vary (rad/s), roughly."""
        return max((6.3 * float(one.period.q) / float(one.period.p) for _, one in self.acting(start)), default=0.0)

    def _way(self, place: int, one: Bump, bits: int) -> acb_mat:
        """Return -size X."""
        key, size = (place, bits), int(self._a.nrows())
        precision = bits
        if all(self._a[i, place] == 0 for i in range(size)):
            self._found[key] = acb_mat(size, 1)  # only samplers see the input: exactly no swing
        while key not in self._found:
            with working_precision(precision):
                turn = acb(0, 2 * arb.pi() / one.period)
                around = acb_mat(size, size, [turn if i % (size + 1) == 0 else 0 for i in range(size * size)])
                column = acb_mat(size, 1, [-one.size * self._a[i, place] for i in range(size)])
                try:
                    self._found[key] = (around - acb_mat(self._a)).solve(column)
                except ZeroDivisionError:  # a mode so near that more digits are needed to tell it from the swing
                    precision *= 2
        return self._found[key]


def _turned(one: Bump, time: fmpq) -> acb:
    turned = 2 * (time - one.begin) / one.period
    return acb(arb.cos_pi_fmpq(turned), arb.sin_pi_fmpq(turned))
