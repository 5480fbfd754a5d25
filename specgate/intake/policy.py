"""The title block and the project's policy: own units, gate, evaluation, thresholds of its own."""

from __future__ import annotations

from typing import Literal, cast

from specgate.approximations.table import APPROXIMATIONS
from specgate.intake.collect import Collector
from specgate.intake.context import Context, entries, table, text, texts
from specgate.intake.nodes import Node, Table, Text
from specgate.intake.values import Reader
from specgate.project.types import GatePolicy, ProjectInfo, Value, Wording
from specgate.terms import expressions
from specgate.terms.dimensions import DIMENSIONLESS
from specgate.terms.expressions import is_read
from specgate.terms.units import UnitTable

Holding = Literal["non_compliant", "open", "out_of_range", "inconclusive"]
DEFAULT_HOLD: tuple[Holding, ...] = ("non_compliant", "open", "out_of_range")
"""What holds the gate unless the project says otherwise."""


def own_units(project: Table, collector: Collector) -> tuple[UnitTable, frozenset[str]]:
    """Return the table of units with the project's own, and the names of those that were reported."""
    node = table(project.get("units"))
    keys = {key.value: (key, value) for key, value in entries(node)}
    definitions = {name: text(value) or "" for name, (_, value) in keys.items()}
    standard = UnitTable.standard()
    units, problems = standard.with_units(definitions)
    for name, problem in problems.items():
        key, value = keys[name]
        taken = standard.is_unit(name)
        spot = key.spot if taken else value.spot
        collector.error("id-duplicate" if taken else "unit-unknown", problem.message, spot.place)
    return units, frozenset(problems)


def stages(project: Table) -> tuple[str, ...]:
    """Return the reviews in their order; the only one where no list is given."""
    listed, stage = texts(project.get("stages")), text(project.get("stage"))
    return listed or ((stage,) if stage is not None else ())


def info(project: Table, context: Context) -> ProjectInfo:
    """Read the title block."""
    stage = project.get("stage")
    if isinstance(stage, Text) and stage.value.strip() not in context.stages:
        context.unknown("stage", stage.value.strip(), context.stages, stage.spot.place)
    return ProjectInfo(
        id=text(project.get("id")) or "",
        title=text(project.get("title")) or "",
        revision=text(project.get("revision")) or "",
        date=text(project.get("date")),
        stage=text(stage),
        stages=context.stages,
        sign_off=texts(project.get("sign_off")),
        place=project.spot.place,
    )


def gate(node: Node | None) -> GatePolicy:
    """Read what holds the gate."""
    body = table(node)
    listed = body.get("hold_on") if body is not None else None
    return GatePolicy(cast("tuple[Holding, ...]", texts(listed)) if listed is not None else DEFAULT_HOLD)


def wording(node: Node | None) -> Wording:
    """Read the project's own words for the texts of requirements."""
    body = table(node)
    return Wording() if body is None else Wording(texts(body.get("unverifiable")), texts(body.get("allowed")))


def thresholds(node: Node | None, context: Context) -> dict[str, dict[str, Value]]:
    """Read the project's own thresholds of conditions, tighter or looser than the catalogue's."""
    found: dict[str, dict[str, Value]] = {}
    for name, body in entries(node):
        for key, value in entries(body):
            threshold = Reader(context).value(value)
            if is_read(threshold.expression) and _allowed(name.value, key, threshold, context):
                found.setdefault(name.value, {})[key.value] = threshold
    return found


def _allowed(name: str, key: Text, value: Value, context: Context) -> bool:
    """Whether a threshold is one of the approximation's; approximations answered later have none yet."""
    row = APPROXIMATIONS.get(name)
    if row is None:
        return True
    known = [condition.key for condition in row.conditions if condition.threshold is not None]
    if key.value not in known:
        context.unknown("threshold", key.value, known, key.spot.place, name)
        return False
    if not _is_plain_number(value.expression):
        message = f"`{value.as_written}`: a threshold is a number greater than zero, without a unit"
        context.collector.error("schema-violation", message, value.place)
        return False
    return True


def _is_plain_number(expression: expressions.Expression) -> bool:
    if expressions.names(expression):
        return False
    try:
        dimension = expressions.as_dimension(expressions.dimension(expression, {}))
        return dimension == DIMENSIONLESS and expressions.evaluate(expression, {}) > 0
    except expressions.ExpressionError:
        return False
