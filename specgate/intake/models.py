"""The model of a subsystem, from its node: one function per form."""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal, cast

from specgate.intake.context import Ports, entries, items, table, text, texts
from specgate.intake.nodes import Items, Node, Number, Table, Text
from specgate.intake.values import Reader, whole
from specgate.project.types import (
    FactoredModel,
    Matrix,
    MatrixModel,
    Model,
    Pair,
    PidModel,
    PoleZeroModel,
    Polynomial,
    PolynomialModel,
    Root,
    SampledModel,
    StateSpaceModel,
    Value,
)

PID_TERMS = (
    "proportional",
    "integral",
    "derivative",
    "gain",
    "integral_time",
    "derivative_time",
    "derivative_lag",
    "set_point_weight",
)


def model(node: Table, reader: Reader, ports: Ports) -> Model | None:
    """Read the model; dead time alone stands beside a gain of 1. None if it is in no form."""
    for key, read in _FORMS.items():
        if node.get(key) is not None:
            return read(node, reader, ports)
    alone = node.get("dead_time")
    return FactoredModel(gain=whole(1, alone)) if alone is not None else None


def _polynomials(node: Table, reader: Reader, ports: Ports) -> PolynomialModel:
    return PolynomialModel(reader.several(node.get("numerator")), reader.several(node.get("denominator")))


def _equation(node: Table, reader: Reader, ports: Ports) -> PolynomialModel:
    equation = table(node.get("equation")) or Table(node.spot, {})
    numerator, denominator = reader.several(equation.get("input")), reader.several(equation.get("output"))
    return PolynomialModel(numerator, denominator, "equation")


def _factored(node: Table, reader: Reader, ports: Ports) -> FactoredModel:
    lags, leads = (reader.several(node.get(key)) for key in ("lags", "leads"))
    pairs, zero_pairs = (_pairs(node.get(key), reader) for key in ("pairs", "zero_pairs"))
    integrators, differentiators = _whole(node.get("integrators")), _whole(node.get("differentiators"))
    return FactoredModel(reader.under(node, "gain"), integrators, differentiators, lags, leads, pairs, zero_pairs)


def _pairs(node: Node | None, reader: Reader) -> tuple[Pair, ...]:
    tables = [table(item) or Table(item.spot, {}) for item in items(node)]
    return tuple(Pair(reader.under(pair, "natural_frequency"), reader.under(pair, "damping")) for pair in tables)


def _poles_and_zeros(node: Table, reader: Reader, ports: Ports) -> PoleZeroModel:
    poles, zeros = (tuple(_root(item, reader) for item in items(node.get(key))) for key in ("poles", "zeros"))
    return PoleZeroModel(poles, zeros, reader.under(node, "leading_coefficient"))


def _root(node: Node, reader: Reader) -> Root:
    if not isinstance(node, Table):
        return Root(reader.value(node))
    return Root(reader.under(node, "real"), reader.under(node, "imaginary"))


def _state_space(node: Table, reader: Reader, ports: Ports) -> StateSpaceModel | None:
    space = table(node.get("state_space")) or Table(node.spot, {})
    states = texts(space.get("states"))
    a = _matrix(space.get("A"), reader, states, states)
    b = _matrix(space.get("B"), reader, states, ports.inputs)
    c = _matrix(space.get("C"), reader, ports.outputs, states)
    d = _matrix(space.get("D"), reader, ports.outputs, ports.inputs) if space.get("D") else ()
    if not states or a is None or b is None or c is None or d is None:
        return None
    return StateSpaceModel(states, a, b, c, d)


def _matrix(node: Node | None, reader: Reader, rows: tuple[str, ...], columns: tuple[str, ...]) -> Matrix | None:
    """Read rows as lists, one plain list where there is one row or column, or a table of rows by name."""
    if isinstance(node, Table):
        return _named_matrix(node, reader, rows, columns)
    if not isinstance(node, Items):
        return None
    if all(isinstance(item, Items) for item in node.nodes):
        return tuple(reader.several(item) for item in node.nodes)
    values = reader.several(node)
    return tuple((value,) for value in values) if len(columns) == 1 else (values,)


def _named_matrix(node: Table, reader: Reader, rows: tuple[str, ...], columns: tuple[str, ...]) -> Matrix | None:
    cells: dict[tuple[str, str], Value] = {}
    good = True
    for row, line in entries(node):
        good = _known("row", row, rows, reader) and good
        for column, cell in entries(line):
            good = _known("column", column, columns, reader) and good
            cells[row.value, column.value] = reader.value(cell)
    if not good:
        return None
    return tuple(tuple(cells.get((row, column)) or whole(0, node) for column in columns) for row in rows)


def _known(what: str, key: Text, names: tuple[str, ...], reader: Reader) -> bool:
    if key.value in names:
        return True
    reader.context.unknown(what, key.value, names, key.spot.place)
    return False


def _pid(node: Table, reader: Reader, ports: Ports) -> PidModel | None:
    return pid(table(node.get("pid")) or Table(node.spot, {}), reader)


def pid(node: Table, reader: Reader) -> PidModel | None:
    """Read a controller with proportional, integral and derivative terms. None if it is in no form."""
    form = cast('Literal["parallel", "standard", "series"] | None', text(node.get("form")))
    terms = {name: reader.value(term) for name in PID_TERMS if (term := node.get(name)) is not None}
    if form not in ("parallel", "standard", "series") or not terms:
        return None
    differentiated = cast('Literal["error", "measurement"]', text(node.get("derivative_on")) or "error")
    return PidModel(form, terms, differentiated)


def _numerators(node: Table, reader: Reader, ports: Ports) -> MatrixModel | None:
    denominator = reader.several(node.get("denominator"))
    found: dict[tuple[str, str], Polynomial] = {}
    good = True
    for output, row in entries(node.get("numerators")):
        good = _known("output", output, ports.outputs, reader) and good
        for source, coefficients in entries(row):
            good = _known("input", source, ports.inputs, reader) and good
            found[output.value, source.value] = reader.several(coefficients)
    return MatrixModel(found, denominator) if good else None


def _sampled(node: Table, reader: Reader, ports: Ports) -> SampledModel | None:
    sampled = table(node.get("sampled")) or Table(node.spot, {})
    period = reader.under(sampled, "period")
    numerator, denominator = reader.several(sampled.get("numerator")), reader.several(sampled.get("denominator"))
    inner = table(sampled.get("pid"))
    controller = pid(inner, reader) if inner is not None else None
    wait = reader.optional(sampled.get("delay"))
    if controller is None and not numerator:
        return None
    return SampledModel(period, numerator, denominator, controller, text(sampled.get("rule")), wait)


def _whole(node: Node | None) -> int:
    """Return a whole number, 0 where it is left out or something else was reported."""
    exact = node.exact if isinstance(node, Number) else 0
    return exact if isinstance(exact, int) else 0


_FORMS: dict[str, Callable[[Table, Reader, Ports], Model | None]] = {
    "numerators": _numerators,
    "numerator": _polynomials,
    "equation": _equation,
    "gain": _factored,
    "leading_coefficient": _poles_and_zeros,
    "state_space": _state_space,
    "pid": _pid,
    "sampled": _sampled,
}
"""The key that shows which form a model is in, and how that is read."""
