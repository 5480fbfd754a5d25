"""What the model of a subsystem reads: parameters, and numbers that stand in it."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Mapping

from specgate.project.parameters import Values
from specgate.project.types import Subsystem, Value
from specgate.terms import expressions
from specgate.terms.expressions import Expression


def model_values(subsystem: Subsystem) -> tuple[Value, ...]:
    """Return every value in the model of a subsystem, its dead time included, in the order of the model."""
    dead_time = () if subsystem.dead_time is None else (subsystem.dead_time,)
    return (*_values(subsystem.model), *dead_time)


def parameters_read(subsystem: Subsystem, values: Values) -> tuple[str, ...]:
    """Return the qualified names of the parameters that a model rests on, those behind formulas included."""
    found: dict[str, None] = {}
    waiting: list[tuple[Expression, str | None]] = [
        (value.expression, subsystem.name) for value in model_values(subsystem)
    ]
    while waiting:
        expression, scope = waiting.pop(0)
        for name in expressions.names(expression):
            qualified = values.scopes[scope].get(name)
            if qualified is not None and qualified not in found:
                found[qualified] = None
                written, where = values.written[qualified]
                waiting.append((written, where))
    return tuple(found)


def literals(subsystem: Subsystem) -> tuple[Value, ...]:
    """Return the values of a model that are data of their own: they read no parameter and hold a number with a unit."""
    return tuple(value for value in model_values(subsystem) if _own_data(value.expression))


def _own_data(expression: Expression) -> bool:
    numbers = (node for node in expression.walk() if isinstance(node, expressions.Number))
    return not expressions.names(expression) and any(node.unit is not None and node.value != 0 for node in numbers)


def _values(node: object) -> Iterator[Value]:
    if isinstance(node, Value):
        yield node
    elif isinstance(node, tuple):
        for part in node:
            yield from _values(part)
    elif isinstance(node, Mapping):
        for part in node.values():
            yield from _values(part)
    elif dataclasses.is_dataclass(node):
        for field in dataclasses.fields(node):
            yield from _values(getattr(node, field.name))
