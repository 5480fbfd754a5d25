"""Checks of the quantities in budgets."""

from __future__ import annotations

from specgate.project import faults
from specgate.project.faults import Fault, Faults
from specgate.project.parameters import Values, evaluate, infer
from specgate.project.percent import relative_to_change
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.types import Budget, Project, Value
from specgate.terms.expressions import as_dimension, literal_unit
from specgate.terms.unit import Unit


def check_budgets(project: Project, values: Values, found: Faults) -> None:
    """Note everything wrong with limits, reserves, frequencies and the phases that blocks may take."""
    for name, requirement in project.requirements.items():
        if requirement.budget is not None:
            with found.noted(requirement=name):
                _check(requirement.budget, values)


def _check(budget: Budget, values: Values) -> None:
    limits = () if budget.limit is None else budget.limit.values
    if budget.frequency is not None:
        refuse_written_rate(budget.frequency, values)
        if evaluate(budget.frequency, values) < 0:
            raise Fault(faults.VALUE, "a frequency is not negative", budget.frequency.place)
    for value in (
        [*limits, *(block.share for block in budget.blocks if block.share is not None)] if budget.blocks else []
    ):
        unit = literal_unit(value.expression)
        if unit is None or unit.angle != 1:
            message = f"`{value.as_written}`: a phase is an angle: give it in deg or rad"
            raise Fault(faults.DIMENSION, message, value.place)
    if len(limits) == 2:
        _same(limits[1], limits[0], values)
        if evaluate(limits[0], values) > evaluate(limits[1], values):
            raise Fault(faults.VALUE, "nothing lies between: the lower limit comes first", limits[0].place)
    if budget.reserve is not None:
        _reserve(budget.reserve, limits, values)


def _reserve(reserve: Value, limits: tuple[Value, ...], values: Values) -> None:
    fraction = relative_to_change(reserve)
    if fraction is None and limits:
        _same(reserve, limits[0], values)
    unit = literal_unit(reserve.expression)
    written = reserve.as_written.strip().startswith("-")
    if written or (fraction is None and not _decibel(unit) and evaluate(reserve, values) < 0):
        raise Fault(faults.VALUE, f"`{reserve.as_written}`: a reserve is not negative", reserve.place)


def _decibel(unit: Unit | None) -> bool:
    return unit is not None and unit.kind == "decibel"


def _same(value: Value, other: Value, values: Values) -> None:
    one, wanted = as_dimension(infer(value, values)), as_dimension(infer(other, values))
    if one != wanted or _decibel(literal_unit(value.expression)) is not _decibel(literal_unit(other.expression)):
        message = f"`{value.as_written}` and `{other.as_written}` are not of one kind"
        raise Fault(faults.DIMENSION, message, value.place)
