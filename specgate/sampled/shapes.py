"""How a signal moves between two jumps: sums of t^j e^(pt) whose weights are linear in the state at the jump.

With y = c z + d u, z' = A z + B u and u constant, Y(s) = c (sI - A)^-1 (z0 + B u/s) + d u/s: for every state and every
held output one exact fraction, all written over their common denominator. Its roots are certified with their exact
multiplicities, so that the shapes are known once for all pieces; only the weights change from piece to piece.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from math import factorial

from flint import acb, acb_mat, acb_poly, acb_series, arb_mat, fmpq, fmpq_mat, fmpq_poly

from specgate.response.modes import GUARD, Expansion, Mode
from specgate.sampled.state_space import Row, of_rows
from specgate.systems.polynomials import least_common_multiple
from specgate.systems.roots import Root, certified_roots
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import series_terms, working_precision

_S = fmpq_poly([0, 1])


class Shapes:
    """y = c z + d u of z' = A z + B u from the states z (moving) and u (held) at the start of a piece."""

    def __init__(self, a: fmpq_mat, b: fmpq_mat, c: Row, d: Row) -> None:
        own = _resolvent(a, c)
        characteristic = a.charpoly()
        forced = [
            sum((own[i] * b[i, j] for i in range(len(c))), fmpq_poly()) + characteristic * d[j] for j in range(len(d))
        ]
        fractions = [
            *(TransferFunction(numerator, characteristic).reduced() for numerator in own),
            *(TransferFunction(numerator, characteristic * _S).reduced() for numerator in forced),
        ]
        self._motion = a, b, c
        self.constant = all(not numerator for numerator in own)
        self.denominator = least_common_multiple(one.denominator for one in fractions)
        self.numerators = [one.numerator * (self.denominator // one.denominator) for one in fractions]
        self._rows: dict[int, list[tuple[acb, acb_mat]]] = {}

    @cached_property
    def speed(self) -> float:
        """The largest |p| (rad/s), roughly."""
        return max((float(abs(root.value).mid()) for root in self._roots(64)), default=0.0)

    @property
    def slopes(self) -> int:
        """The order of the highest derivative that may be the first that is not zero: as many as there are states."""
        return len(self._motion[2]) + 1

    def slope_row(self, order: int) -> fmpq_mat:
        """Return y^(order) at the start, order > 0, as a row over z and u: c A^order and c A^(order-1) B."""
        a, b, c = self._motion
        row = fmpq_mat(1, len(c), c)
        for _ in range(order - 1):
            row = row * a
        return of_rows([[*(row * a).tolist()[0], *(row * b).tolist()[0]]] if c else [[fmpq(0)] * int(b.ncols())])

    def _roots(self, bits: int) -> Sequence[Root]:
        return certified_roots(self.denominator, bits) if self.denominator.degree() > 0 else ()

    def rows(self, bits: int) -> list[tuple[acb, acb_mat]]:
        """Return for each p, of a pair the upper one, the weights of e^(pt), t e^(pt) … as rows over z and u."""
        if bits not in self._rows:
            roots = self._roots(bits + GUARD)
            with working_precision(bits + GUARD):
                tops = [acb_poly(numerator) for numerator in self.numerators]
                self._rows[bits] = [
                    (root.value, _weights(tops, roots, index))
                    for index, root in enumerate(roots)
                    if not root.value.imag < 0
                ]
        return self._rows[bits]

    def expansion(self, state: arb_mat, bits: int) -> Expansion:
        """Return y from a state (z, u) on."""
        with working_precision(bits + GUARD):
            column = acb_mat(state)
            modes = tuple(Mode(pole, tuple((rows * column).entries())) for pole, rows in self.rows(bits))
        return Expansion(fmpq(0), modes, bits + GUARD)


def _resolvent(a: fmpq_mat, c: Row) -> list[fmpq_poly]:
    """Return c adj(sI - A), a row of polynomials: the coefficient of s^i is the sum of a[j] c A^(j-i-1) over j > i."""
    order = len(c)
    if order == 0:
        return []
    characteristic = a.charpoly().coeffs()
    powers = [fmpq_mat(1, order, c)]
    for _ in range(order - 1):
        powers.append(powers[-1] * a)
    coefficients = [
        sum((powers[j - i - 1] * characteristic[j] for j in range(i + 1, order + 1)), fmpq_mat(1, order))
        for i in range(order)
    ]
    return [fmpq_poly([row[0, column] for row in coefficients]) for column in range(order)]


def _weights(tops: Sequence[acb_poly], roots: Sequence[Root], index: int) -> acb_mat:
    """Return the weights at one root, rows by power of t, columns by numerator; those of a pair are taken twice.

    At a root p of multiplicity m they are F[m-1-j]/j!, F being the Taylor series of N(p+x) over the other factors.
    """
    pole, count = roots[index].value, roots[index].multiplicity
    fold = 1 if pole.imag.is_zero() else 2
    shift = acb_poly([pole, 1])
    below = acb_poly([1])
    for k, root in enumerate(roots):
        if k != index:
            below = (below * acb_poly([pole - root.value, 1]) ** root.multiplicity).truncate(count)
    columns = []
    for top in tops:
        above = top(shift).truncate(count)
        with series_terms(count):
            series = (acb_series(above.coeffs(), count) / acb_series(below.coeffs(), count)).coeffs()
        taylor = [*series, *([acb(0)] * (count - len(series)))]
        columns.append([fold * taylor[count - 1 - j] / factorial(j) for j in range(count)])
    return acb_mat(count, len(tops), [column[j] for j in range(count) for column in columns])
