"""State space models: dimensions of the states found from the matrices, and the numerators by determinants."""

from __future__ import annotations

from collections.abc import Iterator

from flint import fmpq, fmpq_mat, fmpq_poly

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.fit import Pair, plain_gain
from specgate.project.rational_forms import Rational
from specgate.project.reader import ModelReader, is_zero
from specgate.project.types import Matrix, StateSpaceModel, Value
from specgate.terms.dimensions import DIMENSIONLESS, TIME, Dimension
from specgate.terms.expressions import PLAIN, as_dimension
from specgate.terms.records import record


def state_space(reader: ModelReader, model: StateSpaceModel) -> Rational:
    """Read x' = A x + B u, y = C x + D u.

    The denominator is det(sI - A), with every mode, and each numerator is C adj(sI - A) B + D det(sI - A). By the
    matrix determinant lemma det(sI - A + b c) = det(sI - A) + c adj(sI - A) b, so a numerator is the difference
    of two characteristic polynomials. Raises Fault.
    """
    reader.check_order(len(model.states))
    _shapes(reader, model)
    by_fit = all(reader.infer(value) is PLAIN for _, _, _, value in _entries(model))
    if not by_fit:
        _States(reader, model).check()
    a, b, c, d = (_numbers(reader, matrix) for matrix in (model.a, model.b, model.c, model.d))
    states = fmpq_mat(a)
    denominator = states.charpoly()
    numerators: dict[Pair, fmpq_poly] = {}
    for column, source in enumerate(reader.subsystem.inputs):
        for row, output in enumerate(reader.subsystem.outputs):
            rank_one = fmpq_mat([[b[i][column] * c[row][j] for j in range(len(a))] for i in range(len(a))])
            numerator = (states - rank_one).charpoly() - denominator
            if d:
                numerator += denominator * d[row][column]
            if numerator:
                scale = _plain_scale(reader, (output, source)) if by_fit else fmpq(1)
                numerators[output, source] = numerator * scale
    return Rational(numerators, denominator)


def _plain_scale(reader: ModelReader, pair: Pair) -> fmpq:
    reader.by_fit = True
    return plain_gain(reader, pair, reader.ratio(*pair), reader.conversion(*pair))


def _numbers(reader: ModelReader, matrix: Matrix) -> list[list[fmpq]]:
    return [[reader.number(value) for value in row] for row in matrix]


def _shapes(reader: ModelReader, model: StateSpaceModel) -> None:
    states, inputs, outputs = len(model.states), len(reader.subsystem.inputs), len(reader.subsystem.outputs)
    wanted = {"A": (model.a, states, states), "B": (model.b, states, inputs), "C": (model.c, outputs, states)}
    if model.d:
        wanted["D"] = (model.d, outputs, inputs)
    for name, (matrix, rows, columns) in wanted.items():
        if len(matrix) != rows or any(len(row) != columns for row in matrix):
            raise Fault(
                faults.VALUE,
                f"{name} has to have {rows} rows of {columns}: {states} states, {inputs} inputs, {outputs} outputs",
                reader.subsystem.model_place,
            )


def _entries(model: StateSpaceModel) -> Iterator[tuple[str, int, int, Value]]:
    for name, matrix in (("A", model.a), ("B", model.b), ("C", model.c), ("D", model.d)):
        for i, row in enumerate(matrix):
            for j, value in enumerate(row):
                if not is_zero(value):
                    yield name, i, j, value


@record
class _Relation:
    """An entry of a matrix: the dimension of variable `target` is that of `source` times `factor`."""

    target: str
    source: str
    factor: Dimension
    value: Value
    where: str


class _States:
    """The dimensions of the states, which nobody declares: each entry ties two variables to each other."""

    def __init__(self, reader: ModelReader, model: StateSpaceModel) -> None:
        self.known = {
            **{f"u{i}": port.unit.dimension for i, port in enumerate(reader.subsystem.inputs.values())},
            **{f"y{i}": port.unit.dimension for i, port in enumerate(reader.subsystem.outputs.values())},
        }
        self.relations = [self._relation(reader, *entry) for entry in _entries(model)]

    def _relation(self, reader: ModelReader, name: str, i: int, j: int, value: Value) -> _Relation:
        target, source, time = {
            "A": (f"x{i}", f"x{j}", TIME),
            "B": (f"x{i}", f"u{j}", TIME),
            "C": (f"y{i}", f"x{j}", DIMENSIONLESS),
            "D": (f"y{i}", f"u{j}", DIMENSIONLESS),
        }[name]
        return _Relation(target, source, as_dimension(reader.infer(value)) * time, value, f"{name}[{i + 1}][{j + 1}]")

    def check(self) -> None:
        """Spread what is known over the relations until nothing new comes; raises Fault where two ways disagree."""
        waiting = self.relations
        while waiting:
            left = [relation for relation in waiting if not self._settled(relation)]
            if len(left) == len(waiting):
                # states that touch no port: one of them may have any dimension
                self.known[left[0].source] = DIMENSIONLESS
            waiting = left

    def _settled(self, relation: _Relation) -> bool:
        source, target = self.known.get(relation.source), self.known.get(relation.target)
        if source is None and target is None:
            if relation.source == relation.target:
                self._compare(relation, DIMENSIONLESS, DIMENSIONLESS)
                return True
            return False
        if source is None and target is not None:
            source = self.known[relation.source] = target / relation.factor
        if target is None and source is not None:
            target = self.known[relation.target] = source * relation.factor
        if source is not None and target is not None:
            self._compare(relation, source, target)
        return True

    def _compare(self, relation: _Relation, source: Dimension, target: Dimension) -> None:
        if target != source * relation.factor:
            time = TIME if relation.where[0] in "AB" else DIMENSIONLESS
            found, wanted = relation.factor / time, target / source / time
            raise Fault(
                faults.DIMENSION,
                f"`{relation.value.as_written}` at {relation.where} is in {found}, the rest of the model wants "
                f"{wanted} there (beside a unit a plain number is dimensionless)",
                relation.value.place,
            )
