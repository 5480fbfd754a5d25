"""Expressions as frozen trees of a closed list of nodes; nothing else can ever come out of a file."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import field
from typing import Literal

from flint import fmpq

from specgate.terms.records import record
from specgate.terms.unit import Unit


class ExpressionError(ValueError):
    """An expression that cannot be read, evaluated or given a dimension; `offset` counts characters from 0."""

    def __init__(self, message: str, offset: int = 0) -> None:
        super().__init__(message)
        self.message = message
        self.offset = offset


class ExpressionUnitError(ExpressionError):
    """An expression with a unit in it that is not in the table."""


@record
class Expression:
    """A node of an expression; `offset` is where it stands in the text that was read."""

    offset: int = field(default=0, compare=False, kw_only=True)

    @property
    def parts(self) -> tuple[Expression, ...]:
        """The nodes directly below this one."""
        return ()

    @property
    def depends_on_pi(self) -> bool:
        """Whether a constant in this tree is not rational: pi itself, a unit with pi in it, a value in dB."""
        return any(part.depends_on_pi for part in self.parts)

    def walk(self) -> Iterator[Expression]:
        """Give this node and all below it, in the order of the text."""
        yield self
        for part in self.parts:
            yield from part.walk()


@record
class Number(Expression):
    """A number as written, in its unit (None: a plain number)."""

    value: fmpq
    unit: Unit | None = None

    @property
    def depends_on_pi(self) -> bool:
        """Whether its size in coherent SI is irrational."""
        if self.unit is None:
            return False
        return self.unit.pi_power != 0 or (self.unit.kind == "decibel" and (self.value / 20).q != 1)


@record
class Pi(Expression):
    """The number pi."""

    @property
    def depends_on_pi(self) -> bool:
        """Always."""
        return True


@record
class Name(Expression):
    """A parameter, by its name (`lag`) or by subsystem and name (`hoist_drive.lag`)."""

    name: str


@record
class Unread(Expression):
    """Something that could not be read, which has been reported: whatever rests on it has nothing more to say."""


@record
class PercentOf(Expression):
    """`percent % of name`: of a parameter, or of the signal's `span` or `change`."""

    percent: fmpq
    name: str


@record
class Negative(Expression):
    """Minus the operand."""

    operand: Expression

    @property
    def parts(self) -> tuple[Expression, ...]:
        """The operand."""
        return (self.operand,)


@record
class Binary(Expression):
    """left operator right."""

    operator: Literal["+", "-", "*", "/"]
    left: Expression
    right: Expression

    @property
    def parts(self) -> tuple[Expression, ...]:
        """Left and right."""
        return (self.left, self.right)


@record
class Power(Expression):
    """base to a whole power."""

    base: Expression
    exponent: int

    @property
    def parts(self) -> tuple[Expression, ...]:
        """The base."""
        return (self.base,)
