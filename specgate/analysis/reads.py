"""What the model of a subsystem reads: parameters, and numbers that stand in it."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Any

from specgate.project.parameters import Values
from specgate.project.types import Subsystem, Value
from specgate.terms import expressions
from specgate.terms.expressions import Expression
from specgate.terms.places import Place
from specgate.terms.unit import Unit


def model_values(subsystem: Subsystem) -> tuple[Value, ...]:
    """Return every value in the model of a subsystem, its dead time included, in the order of the model."""
    dead_time = () if subsystem.dead_time is None else (subsystem.dead_time,)
    return (*_values(subsystem.model), *dead_time)


def parameters_read(subsystem: Subsystem, values: Values) -> tuple[str, ...]:
    """Return the qualified names of the parameters that a model rests on, those behind formulas included."""
    return _followed([value.expression for value in model_values(subsystem)], subsystem.name, values)


def read_by(node: object, scope: str | None, values: Values) -> tuple[str, ...]:
    """Return the qualified names of the parameters that any part of a specification rests on, formulas followed.

    scope: the subsystem in which its expressions stand; None outside of one.
    """
    return _followed(list(_expressions(node)), scope, values)


def _followed(roots: list[Expression], scope: str | None, values: Values) -> tuple[str, ...]:
    found: dict[str, None] = {}
    waiting: list[tuple[Expression, str | None]] = [(one, scope) for one in roots]
    while waiting:
        expression, within = waiting.pop(0)
        for name in expressions.names(expression):
            qualified = values.scopes[within].get(name)
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
    else:
        for part in _parts(node):
            yield from _values(part)


def _expressions(node: object) -> Iterator[Expression]:
    if isinstance(node, Value):
        yield node.expression
    elif isinstance(node, Expression):
        yield node
    elif not isinstance(node, Unit | Place):
        for part in _parts(node):
            yield from _expressions(part)


def _parts(node: Any) -> Iterator[object]:
    if isinstance(node, tuple):
        yield from node
    elif isinstance(node, Mapping):
        yield from node.values()
    else:
        for name in _names(node.__class__):
            yield getattr(node, name)


@cache
def _names(kind: type) -> tuple[str, ...]:
    """Return the fields of a dataclass, of anything else none; `fields` looks through all of them at every call."""
    return tuple(field.name for field in dataclasses.fields(kind)) if dataclasses.is_dataclass(kind) else ()
