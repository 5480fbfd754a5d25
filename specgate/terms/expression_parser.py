"""Text of an expression to its tree, by a parser of our own: a text is never run as code."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace
from typing import Literal, cast

from specgate.terms.decimals import DecimalError, exact_decimal
from specgate.terms.records import record
from specgate.terms.trees import (
    Binary,
    Expression,
    ExpressionError,
    ExpressionUnitError,
    Name,
    Negative,
    Number,
    PercentOf,
    Pi,
    Power,
)
from specgate.terms.units import Unit, UnitError, UnitTable

LONGEST = 1000
"""Most characters of an expression."""
MOST_NODES = 200
"""Most numbers, names and operators: it bounds the depth of the tree as well."""
DEEPEST = 40
"""Most brackets (and signs) inside one another."""
GREATEST_POWER = 64
"""Greatest whole power."""

_NUMBER = re.compile(r"(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?", re.ASCII)
_NAME = re.compile(r"[A-Za-z_][A-Za-z0-9_]*(?:\.[A-Za-z_][A-Za-z0-9_]*)?", re.ASCII)
_OPERATOR = re.compile(r"\*\*|[-+*/()]")
_UNIT_STARTS = re.compile(r"1/|[^\W\d_]|[%\u00b0]")
_OF = re.compile(r"\s+of\s+(?:the\s+)?(?P<name>[A-Za-z_][A-Za-z0-9_.]*)", re.ASCII)
_POWER = re.compile(r"\s*(?P<power>[+-]?[0-9]+|\(\s*[+-]?[0-9]+\s*\))(?![.eE0-9A-Za-z_])", re.ASCII)


@record
class _Token:
    kind: Literal["value", "operator", "end"]
    offset: int
    text: str
    node: Expression | None = None


def parse(text: str, units: UnitTable) -> Expression:
    """Read an expression.

    Grammar: `+ - * / **` with a whole power, brackets, numbers, quantities (number, space, unit), `pi`, names,
    `2 % of NAME`. Raises ExpressionError with the offset of what is wrong; takes at most a few milliseconds
    whatever the text.
    """
    if len(text) > LONGEST:
        raise ExpressionError(f"an expression has at most {LONGEST} characters, this one has {len(text)}")
    return _Parser(text, units).read()


class _Parser:
    """Recursive descent with one token of look-ahead."""

    def __init__(self, text: str, units: UnitTable) -> None:
        self.text, self.units, self.at, self.nodes, self.depth = text, units, 0, 0, 0
        self.token = self._next()

    def read(self) -> Expression:
        if not self.text.strip():
            raise ExpressionError("a number, a quantity or an expression is wanted here", 0)
        tree = self._sum()
        if self.token.kind != "end":
            raise ExpressionError(self._misplaced(), self.token.offset)
        return tree

    # --- grammar ------------------------------------------------------------------------------------------

    def _sum(self) -> Expression:
        tree = self._product()
        while self.token.text in ("+", "-"):
            tree = self._joined(tree, self._product)
        return tree

    def _product(self) -> Expression:
        tree = self._signed()
        while self.token.text in ("*", "/"):
            tree = self._joined(tree, self._signed)
        return tree

    def _joined(self, left: Expression, operand: Callable[[], Expression]) -> Expression:
        sign = self._take()
        right = operand()
        for side in (left, right):
            _refuse_decibel(side)
        operator = cast(Literal["+", "-", "*", "/"], sign.text)
        return Binary(operator, left, right, offset=sign.offset)

    def _signed(self) -> Expression:
        if self.token.text not in ("+", "-"):
            return self._power()
        sign = self._take()
        self._enter(sign)
        operand = self._signed()
        self.depth -= 1
        if sign.text == "+":
            return operand
        if isinstance(operand, Number):
            # -6 dB is the ratio 0.5 and -10 degC a temperature: the sign belongs to the number, not to its size in SI
            return replace(operand, value=-operand.value, offset=sign.offset)
        return Negative(operand, offset=sign.offset)

    def _power(self) -> Expression:
        base = self._atom()
        if self.token.text != "**":
            return base
        _refuse_decibel(base)
        sign = self.token
        power = Power(base, self._exponent(sign), offset=sign.offset)
        if self.token.text == "**":
            raise ExpressionError("a power of a power needs brackets", self.token.offset)
        return power

    def _exponent(self, sign: _Token) -> int:
        match = _POWER.match(self.text, sign.offset + 2)
        digits = match["power"].strip("() \t") if match else ""
        if match is None or len(digits) > 4 or abs(int(digits)) > GREATEST_POWER:
            raise ExpressionError(
                f"a power is a whole number from -{GREATEST_POWER} to {GREATEST_POWER}", sign.offset + 2
            )
        self.at = match.end()
        self.token = self._next()
        return int(digits)

    def _atom(self) -> Expression:
        token = self._take()
        if token.node is not None:
            return token.node
        if token.text != "(":
            wanted = "a number, a name or an opening bracket is wanted"
            raise ExpressionError(f"{wanted} {_instead_of(token)}", token.offset)
        self._enter(token)
        tree = self._sum()
        self.depth -= 1
        if self.token.text != ")":
            raise ExpressionError(f"the bracket opened at character {token.offset + 1} is not closed", token.offset)
        self._take()
        return tree

    def _enter(self, token: _Token) -> None:
        self.depth += 1
        if self.depth > DEEPEST:
            raise ExpressionError(f"more than {DEEPEST} brackets and signs inside one another", token.offset)

    # --- tokens -------------------------------------------------------------------------------------------

    def _take(self) -> _Token:
        token = self.token
        self.token = self._next()
        return token

    def _next(self) -> _Token:
        while self.at < len(self.text) and self.text[self.at] in " \t\r\n":
            self.at += 1
        offset = self.at
        if offset == len(self.text):
            return _Token("end", offset, "")
        self.nodes += 1
        if self.nodes > MOST_NODES:
            raise ExpressionError(f"an expression has at most {MOST_NODES} numbers, names and operators", offset)
        if match := _NUMBER.match(self.text, offset):
            self.at = match.end()
            return self._shown(self._number(match[0], offset), offset)
        if match := _NAME.match(self.text, offset):
            self.at = match.end()
            node = Pi(offset=offset) if match[0] == "pi" else Name(match[0], offset=offset)
            return self._shown(node, offset)
        if match := _OPERATOR.match(self.text, offset):
            self.at = match.end()
            return _Token("operator", offset, match[0])
        raise ExpressionError(_strange(self.text[offset]), offset)

    def _shown(self, node: Expression, offset: int) -> _Token:
        # the text of a value is for messages only; it never equals an operator
        return _Token("value", offset, self.text[offset : self.at], node)

    def _number(self, literal: str, offset: int) -> Expression:
        try:
            value = exact_decimal(literal)
        except DecimalError as problem:
            raise ExpressionError(str(problem), offset) from None
        following = self.text[self.at : self.at + 1]
        if following and (_UNIT_STARTS.match(following) or following in "._"):
            word = self.text[self.at : _unit_end(self.text, self.at)]
            raise ExpressionError(f"put a space between the number and its unit: `{literal} {word[:20]}`", self.at)
        start = self.at
        while self.text[start : start + 1] == " ":
            start += 1
        if start == self.at or _UNIT_STARTS.match(self.text, start) is None:
            return Number(value, offset=offset)
        unit = self._unit(start)
        if unit.kind == "percent" and (match := _OF.match(self.text, self.at)):
            self.at = match.end()
            return PercentOf(value, match["name"], offset=offset)
        return Number(value, unit, offset=offset)

    def _unit(self, start: int) -> Unit:
        self.at = _unit_end(self.text, start)
        word = self.text[start : self.at]
        try:
            return self.units.parse(word)
        except UnitError as problem:
            message = problem.message
            if _NAME.fullmatch(word):
                message += f" (or `* {word[:40]}`, if it is a name)"
            elif set(word) & set("*/+-"):
                message += " (a unit runs to the next space: put spaces around the operators of an expression)"
            raise ExpressionUnitError(message, start) from None

    def _misplaced(self) -> str:
        text = self.token.text
        if text == ")":
            return "a closing bracket without an opening one"
        if self.units.is_unit(text):
            return f"the unit `{text}` has to follow a number directly: `(a + b) * 1 {text}`"
        return f"an operator is wanted before `{text[:40]}`"


def _unit_end(text: str, start: int) -> int:
    """Where the unit that starts at `start` ends: the next space or bracket, but for brackets of its own."""
    depth = 0
    for at in range(start, len(text)):
        char = text[at]
        if char == "(" and (depth or text[at - 1] in "*/"):
            depth += 1
        elif char == ")" and depth:
            depth -= 1
        elif char in " \t\r\n()":
            return at
    return len(text)


def _refuse_decibel(node: Expression) -> None:
    if isinstance(node, Number) and node.unit is not None and node.unit.kind == "decibel":
        raise ExpressionError("a value in dB stands alone: write the ratio to calculate with it", node.offset)


def _instead_of(token: _Token) -> str:
    return "at the end" if token.kind == "end" else f"instead of `{token.text}`"


def _strange(char: str) -> str:
    if char == "^":
        return "a power is written `**`"
    shown = char if char.isprintable() else f"U+{ord(char):04X}"
    return f"`{shown}` has no place in an expression (allowed: + - * / ** ( ), numbers with units, names, pi)"
