"""What can be asked of an expression: its names, its value, its dimension."""

from __future__ import annotations

from collections.abc import Mapping
from enum import Enum
from typing import Final

from flint import fmpq, fmpz

from specgate.terms.decibels import amplitude_ratio
from specgate.terms.dimensions import DIMENSIONLESS, Dimension
from specgate.terms.expression_parser import parse
from specgate.terms.names import nearest
from specgate.terms.trees import (
    Binary,
    Expression,
    ExpressionError,
    Name,
    Negative,
    Number,
    PercentOf,
    Pi,
    Power,
    Unread,
)
from specgate.terms.unit import PI, Unit

__all__ = [
    "MOST_BITS",
    "PLAIN",
    "Binary",
    "Expression",
    "ExpressionError",
    "Inferred",
    "Name",
    "Negative",
    "Number",
    "PercentOf",
    "Pi",
    "Plain",
    "Power",
    "Unread",
    "as_dimension",
    "dimension",
    "evaluate",
    "is_read",
    "literal_unit",
    "names",
    "parse",
    "references",
    "unknown",
]

MOST_BITS = 8192
"""Most bits of a numerator or denominator on the way: beyond it an expression is refused, not waited for."""


class Plain(Enum):
    """The dimension of a number without a unit: dimensionless, or by fit where all numbers beside it are plain."""

    PLAIN = "plain"

    def __str__(self) -> str:
        return "a plain number"


PLAIN: Final = Plain.PLAIN
Inferred = Dimension | Plain


def names(expression: Expression) -> tuple[str, ...]:
    """Return the names that an expression reads, in order of first use, without repetition."""
    return tuple(dict.fromkeys(node.name for node in references(expression)))


def references(expression: Expression) -> tuple[Name | PercentOf, ...]:
    """Return the nodes that read a name, each with its offset, in the order of the text."""
    return tuple(node for node in expression.walk() if isinstance(node, Name | PercentOf))


def is_read(expression: Expression) -> bool:
    """Whether all of an expression could be read."""
    return not any(isinstance(node, Unread) for node in expression.walk())


def literal_unit(expression: Expression) -> Unit | None:
    """Return the unit if the expression is one quantity as written (`-6 dB`, `85 ms`), else None."""
    return expression.unit if isinstance(expression, Number) else None


# --- value -----------------------------------------------------------------------------------------------


def evaluate(expression: Expression, values: Mapping[str, fmpq], pi: fmpq = PI) -> fmpq:
    """Return the exact value in coherent SI; names are read from `values` (SI); dB becomes an amplitude ratio.

    Raises ExpressionError for an unknown name, a division by zero or a number beyond MOST_BITS.
    """
    value = _value(expression, values, pi)
    if _bits(value) > MOST_BITS:
        raise ExpressionError("this is too large a number to work with", expression.offset)
    return value


def _value(node: Expression, values: Mapping[str, fmpq], pi: fmpq) -> fmpq:
    match node:
        case Number():
            return _size(node, pi)
        case Pi():
            return pi
        case Name():
            return _looked_up(node, values)
        case PercentOf():
            return node.percent / 100 * _looked_up(node, values)
        case Negative():
            return -evaluate(node.operand, values, pi)
        case Power():
            return _raised(node, evaluate(node.base, values, pi))
        case Binary():
            return _combined(node, evaluate(node.left, values, pi), evaluate(node.right, values, pi))
    raise TypeError(f"not a node of an expression: {node!r}")


def _size(node: Number, pi: fmpq) -> fmpq:
    if node.unit is None:
        return node.value
    if node.unit.kind != "decibel":
        return node.value * node.unit.factor_with(pi)
    try:
        return amplitude_ratio(node.value, pi)
    except ValueError as problem:
        raise ExpressionError(str(problem), node.offset) from None


def _combined(node: Binary, left: fmpq, right: fmpq) -> fmpq:
    if node.operator == "+":
        return left + right
    if node.operator == "-":
        return left - right
    if node.operator == "*":
        return left * right
    if right == 0:
        raise ExpressionError("division by zero", node.offset)
    return left / right


def _raised(node: Power, base: fmpq) -> fmpq:
    if base == 0 and node.exponent < 0:
        raise ExpressionError("division by zero (a negative power of zero)", node.offset)
    if _bits(base) * abs(node.exponent) > MOST_BITS:
        raise ExpressionError("this power is too large a number to work with", node.offset)
    return base**node.exponent


def _looked_up(node: Name | PercentOf, values: Mapping[str, fmpq]) -> fmpq:
    if node.name not in values:
        raise ExpressionError(unknown(node.name, values), node.offset)
    return values[node.name]


def _bits(value: fmpq) -> int:
    return max(fmpz(value.p).bit_length(), fmpz(value.q).bit_length())


def unknown(name: str, known: Mapping[str, object]) -> str:
    """Say that a name is unknown, with the nearest known one."""
    close = nearest(name, known)
    return f"there is no parameter `{name[:60]}`" + (f"; did you mean `{close}`?" if close else "")


# --- dimension -------------------------------------------------------------------------------------------


def dimension(expression: Expression, dimensions: Mapping[str, Inferred]) -> Inferred:
    """Return the dimension of an expression, PLAIN if no unit comes into it.

    A plain number beside a dimension counts as dimensionless. Raises ExpressionError.
    """
    match expression:
        case Number(unit=unit):
            return PLAIN if unit is None else unit.dimension
        case Name(name=name) | PercentOf(name=name):
            if name not in dimensions:
                raise ExpressionError(unknown(name, dimensions), expression.offset)
            return dimensions[name]
        case Negative(operand=operand):
            return dimension(operand, dimensions)
        case Power(base=base, exponent=exponent):
            inferred = dimension(base, dimensions)
            return inferred if inferred is PLAIN else inferred**exponent
        case Binary(left=left, right=right):
            return _joined(expression, dimension(left, dimensions), dimension(right, dimensions))
    return PLAIN


def _joined(node: Binary, left: Inferred, right: Inferred) -> Inferred:
    if left is PLAIN and right is PLAIN:
        return PLAIN
    one, other = as_dimension(left), as_dimension(right)
    if node.operator == "*":
        return one * other
    if node.operator == "/":
        return one / other
    if one != other:
        verb = "added to" if node.operator == "+" else "subtracted from"
        raise ExpressionError(f"{right} cannot be {verb} {left}", node.offset)
    return one


def as_dimension(inferred: Inferred) -> Dimension:
    """Return the dimension, a plain number being dimensionless."""
    return DIMENSIONLESS if inferred is PLAIN else inferred
