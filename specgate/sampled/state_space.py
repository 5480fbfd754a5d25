"""Exact state-space forms: of a block as written, and of what lies between chosen inputs and outputs."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from flint import fmpq, fmpq_mat, fmpq_poly

from specgate.sampled.blocks import SampledBlock
from specgate.systems.blocks import Block
from specgate.systems.modes import block_modes
from specgate.systems.polynomials import exact_quotient, monic
from specgate.terms.records import record

Row = list[fmpq]


@record
class StateSpace:
    """x' = A x + B u, y = C x + D u, or the same with x[k + 1] for x'."""

    a: fmpq_mat
    b: fmpq_mat
    c: fmpq_mat
    d: fmpq_mat

    @property
    def order(self) -> int:
        """How many states there are."""
        return int(self.a.nrows())

    def transposed(self) -> StateSpace:
        """Return the dual: inputs and outputs changed about."""
        return StateSpace(self.a.transpose(), self.c.transpose(), self.b.transpose(), self.d.transpose())

    def reduced(self) -> StateSpace:
        """Return what is reached from the inputs and shows at the outputs; the rest is hidden (Kalman 1963)."""
        return self._reached().transposed()._reached().transposed()

    def _reached(self) -> StateSpace:
        krylov, power = [], self.b
        for _ in range(self.order):
            krylov += _columns(power)
            power = self.a * power
        basis = _independent(krylov, self.order)
        if len(basis) == self.order:
            return self
        if not basis:
            return StateSpace(fmpq_mat(0, 0), fmpq_mat(0, self.b.ncols()), fmpq_mat(self.c.nrows(), 0), self.d)
        inside = fmpq_mat(basis).transpose()
        # the left inverse of a basis: its Gram matrix is positive definite
        back = (inside.transpose() * inside).inv() * inside.transpose()
        return StateSpace(back * self.a * inside, back * self.b, self.c * inside, self.d)


def realised(block: Block | SampledBlock) -> StateSpace:
    """Return a proper block with every mode that it has as written. Raises ValueError for an improper one."""
    denominator = monic(block.denominator)
    lead = block.denominator.leading_coefficient()
    entries = [
        [block.numerators.get((output, source), fmpq_poly()) / lead for source in block.inputs]
        for output in block.outputs
    ]
    if any(entry.degree() > denominator.degree() for row in entries for entry in row):
        raise ValueError(f"`{block.name}` differentiates without a lag, which is not answered beside a sampled block")
    if len(block.inputs) == 1:
        return _from_one_input([row[0] for row in entries], denominator)
    if len(block.outputs) == 1:
        return _from_one_input(entries[0], denominator).transposed()
    columns = [_from_one_input([row[j] for row in entries], denominator) for j in range(len(block.inputs))]
    least = beside(columns).reduced()
    every = block_modes(Block(block.name, block.inputs, block.outputs, block.numerators, block.denominator))
    hidden = exact_quotient(every, least.a.charpoly())
    return least if hidden.degree() == 0 else _with_hidden(least, hidden)


def _from_one_input(numerators: Sequence[fmpq_poly], denominator: fmpq_poly) -> StateSpace:
    """Return the companion form: the states are 1, s, s^2 … over the denominator."""
    order = denominator.degree()
    divided = [divmod(numerator, denominator) for numerator in numerators]
    return StateSpace(
        companion(denominator),
        fmpq_mat(order, 1, [fmpq(int(i == order - 1)) for i in range(order)]),
        fmpq_mat(len(numerators), order, [rest[i] for _, rest in divided for i in range(order)]),
        fmpq_mat(len(numerators), 1, [quotient[0] for quotient, _ in divided]),
    )


def companion(monic_polynomial: fmpq_poly) -> fmpq_mat:
    """Return the companion matrix of a monic polynomial."""
    order = monic_polynomial.degree()
    matrix = fmpq_mat(order, order)
    for i in range(order - 1):
        matrix[i, i + 1] = fmpq(1)
    for j in range(order):
        matrix[order - 1, j] = -monic_polynomial[j]
    return matrix


def beside(systems: Sequence[StateSpace]) -> StateSpace:
    """Return systems with inputs of their own, their outputs added up."""
    direct = [
        [entry for system in systems for entry in row] for row in zip(*(s.d.tolist() for s in systems), strict=True)
    ]
    rows = [[entry for part in parts for entry in part] for parts in zip(*(s.c.tolist() for s in systems), strict=True)]
    return StateSpace(diagonal(s.a for s in systems), diagonal(s.b for s in systems), of_rows(rows), of_rows(direct))


def _with_hidden(system: StateSpace, hidden: fmpq_poly) -> StateSpace:
    more = hidden.degree()
    rows = [[*row, *([fmpq(0)] * more)] for row in system.c.tolist()]
    b = fmpq_mat([*system.b.tolist(), *([[fmpq(0)] * int(system.b.ncols())] * more)])
    return StateSpace(diagonal([system.a, companion(hidden)]), b, of_rows(rows), system.d)


def diagonal(parts: Iterable[fmpq_mat]) -> fmpq_mat:
    """Return a matrix with `parts` down its diagonal."""
    blocks = list(parts)
    result = fmpq_mat(sum(int(b.nrows()) for b in blocks), sum(int(b.ncols()) for b in blocks))
    top = left = 0
    for block in blocks:
        for i, row in enumerate(block.tolist()):
            for j, entry in enumerate(row):
                result[top + i, left + j] = entry
        top, left = top + int(block.nrows()), left + int(block.ncols())
    return result


def of_rows(rows: Sequence[Sequence[fmpq]], columns: int = 0) -> fmpq_mat:
    """Return the matrix of these rows; `columns` says how many an empty one has."""
    width = len(rows[0]) if rows else columns
    return fmpq_mat(len(rows), width, [entry for row in rows for entry in row])


def identity(size: int) -> fmpq_mat:
    """Return the unit matrix."""
    return fmpq_mat(size, size, [fmpq(int(i % (size + 1) == 0)) for i in range(size * size)])


def _columns(matrix: fmpq_mat) -> list[Row]:
    return [list(row) for row in matrix.transpose().tolist()]


def _independent(columns: Sequence[Row], size: int) -> list[Row]:
    """Return the first columns that are independent of those before them."""
    if not columns or size == 0:
        return []
    echelon, rank = fmpq_mat(columns).transpose().rref()
    pivots = []
    for row in echelon.tolist()[: int(rank)]:
        pivots.append(next(j for j, entry in enumerate(row) if entry != 0))
    return [columns[j] for j in pivots]
