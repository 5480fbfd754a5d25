"""Signal expressions: sums of signals and of blocks applied to sums, read by a parser of our own.

sum    = ["+" | "-"] term {("+" | "-") term}
term   = factor {("*" | "/") factor}          one factor is a signal, the others are constants
factor = ["+" | "-"] ( number [unit] | parameter | signal | call | "(" sum ")" )
call   = block "(" sum | name "=" sum {"," name "=" sum} ")" ["." output]
"""

from __future__ import annotations

import re
from typing import Literal

from flint import fmpq

from specgate.intake.context import Context, LoopNames
from specgate.intake.nodes import Text
from specgate.intake.values import Reader
from specgate.project.types import Call, Scaled, SignalExpression, SignalName, Sum
from specgate.terms.expressions import Binary, Expression, Negative, Number, is_read
from specgate.terms.records import record

LONGEST = 4000
"""Characters of a signal expression."""
MOST_TOKENS = 400
"""Names, numbers and signs of a signal expression."""
DEEPEST = 40
"""Brackets inside one another."""

_TOKEN = re.compile(
    r"(?P<number>(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)"
    r"(?P<unit>[ ]+[A-Za-z%°µ](?:[^\s()=,]|(?<=[*/])\([^\s()]*\))*)?"
    r"|(?P<name>[A-Za-z_][A-Za-z0-9_]*)|(?P<sign>\*\*|[-+*/().,=])|(?P<space>\s+)|(?P<other>.)",
    re.ASCII | re.DOTALL,
)


class _Refused(Exception):
    """The expression cannot be read: a rule, a message (None where it was reported) and an offset."""

    def __init__(self, message: str | None, offset: int = 0, rule: str = "schema-violation") -> None:
        super().__init__(message)
        self.message, self.offset, self.rule = message, offset, rule


@record
class _Token:
    kind: str
    text: str
    at: int


@record
class _Constant:
    """A part without a signal in it."""

    expression: Expression


@record
class _Stranger:
    """A name that is not known: it may have been meant as a signal or as a constant, and fits wherever it stands."""

    name: SignalName


_Part = SignalExpression | _Constant | _Stranger


def signal_expression(node: Text, names: LoopNames, context: Context) -> SignalExpression | None:
    """Read the equation of a signal. None if it cannot be read; names in it that are not known are kept."""
    try:
        return _Parser(node, names, context).read()
    except _Refused as refused:
        if refused.message is not None:
            context.collector.error(refused.rule, refused.message, node.place_of(refused.offset))
        return None


class _Parser:
    """Recursive descent with one token of look-ahead."""

    def __init__(self, node: Text, names: LoopNames, context: Context) -> None:
        self.node, self.names, self.context = node, names, context
        self.signals = frozenset((*names.inputs, *names.signals))
        self.depth = 0
        self.index = 0
        self.tokens = self._tokens(node.value)

    def _tokens(self, words: str) -> list[_Token]:
        if len(words) > LONGEST:
            raise _Refused(f"a signal expression has at most {LONGEST} characters")
        tokens = []
        for match in _TOKEN.finditer(words):
            kind = "number" if match["number"] else str(match.lastgroup)
            if kind == "other":
                raise _Refused(f"`{match[0]}` has no place in a signal expression", match.start())
            if kind != "space":
                tokens.append(_Token(kind, match[0], match.start()))
        if len(tokens) > MOST_TOKENS:
            raise _Refused(f"a signal expression has at most {MOST_TOKENS} names, numbers and signs: split it")
        return [*tokens, _Token("end", "the end", len(words))]

    def read(self) -> SignalExpression:
        part = self._sum()
        if self._now.kind != "end":
            raise _Refused(f"`{self._now.text}` is not expected here: an operator is missing before it", self._now.at)
        return self._signal(part, 0)

    # --- grammar ------------------------------------------------------------------------------------------

    def _sum(self) -> _Part:
        start = self._now.at
        parts = [self._term()]
        while self._now.text in ("+", "-"):
            sign = self._take()
            part = self._term()
            parts.append(self._minus(part, sign.at) if sign.text == "-" else part)
        if len(parts) == 1:
            return parts[0]
        if all(isinstance(part, _Constant) for part in parts):
            return self._constant(start)
        return Sum(tuple(self._signal(part, start) for part in parts), self.node.place_of(start))

    def _term(self) -> _Part:
        start = self._now.at
        part = self._factor()
        while self._now.text in ("*", "/", "**"):
            sign = self._take()
            other = self._factor()
            part = self._joined(sign, part, other, start)
        return part

    def _joined(self, sign: _Token, left: _Part, right: _Part, start: int) -> _Part:
        if isinstance(left, _Constant) and isinstance(right, _Constant):
            return self._constant(start)
        if isinstance(left, _Stranger):
            return left if isinstance(right, _Constant) else right
        if isinstance(right, _Stranger):
            return right if isinstance(left, _Constant) else left
        if sign.text == "**":
            raise _Refused("a power of a signal is not linear: a loop is wired of sums and constants", sign.at)
        if isinstance(left, _Constant) and not isinstance(right, _Constant) and sign.text == "*":
            return self._scaled(left.expression, right, start)
        if isinstance(right, _Constant) and not isinstance(left, _Constant):
            return self._scaled(_factor(sign.text, right.expression), left, start)
        what = "a division by a signal" if sign.text == "/" else "a product of two signals"
        raise _Refused(f"{what} is not linear: a loop is wired of sums and constants", sign.at)

    def _factor(self) -> _Part:
        token = self._take()
        if token.text in ("+", "-"):
            self._enter(token.at)
            part = self._factor()
            self.depth -= 1
            return self._minus(part, token.at) if token.text == "-" else part
        if token.text == "(":
            self._enter(token.at)
            part = self._sum()
            self.depth -= 1
            self._close(token)
            return self._constant(token.at) if isinstance(part, _Constant) else part
        if token.kind == "number":
            return self._constant(token.at)
        if token.kind == "name":
            return self._call(token) if self._now.text == "(" else self._name(token)
        raise _Refused(f"a signal, a block or a number is wanted here, found `{token.text}`", token.at)

    def _call(self, block: _Token) -> Call:
        opening = self._take()
        self._enter(opening.at)
        ports = self.context.ports.get(block.text)
        if ports is None:
            self._unknown(block, "block", tuple(self.context.ports))
            return self._stranger(block, opening)
        if not ports.inputs or not ports.outputs:
            return self._stranger(block, opening)
        arguments = self._arguments(block, ports.inputs)
        self.depth -= 1
        self._close(opening)
        output = self._output(block, ports.outputs)
        return Call(block.text, arguments, output, self.node.place_of(block.at))

    def _stranger(self, block: _Token, opening: _Token) -> Call:
        """Read a call of a block of which nothing is known, for the sake of what it is applied to."""
        arguments: dict[str, SignalExpression] = {}
        while self._now.text != ")":
            named = self._now.kind == "name" and self.tokens[self.index + 1].text == "="
            name = self._take().text if named else "input"
            if named:
                self._take()
            start = self._now.at
            arguments[name] = self._signal(self._sum(), start)
            if self._now.text != ",":
                break
            self._take()
        self.depth -= 1
        self._close(opening)
        if self._now.text == ".":
            self._take()
            self._take()
        return Call(block.text, arguments, "output", self.node.place_of(block.at))

    def _arguments(self, block: _Token, inputs: tuple[str, ...]) -> dict[str, SignalExpression]:
        if self._now.text == ")":
            raise _Refused(f"`{block.text}` is applied to nothing: name a signal between the brackets", self._now.at)
        if not (self._now.kind == "name" and self.tokens[self.index + 1].text == "="):
            start = self._now.at
            if len(inputs) > 1:
                wanted = ", ".join(f"{name}=…" for name in inputs)
                raise _Refused(f"`{block.text}` has several inputs: write `{block.text}({wanted})`", start)
            return {inputs[0]: self._signal(self._sum(), start)}
        found: dict[str, SignalExpression] = {}
        while True:
            self._named_argument(block, inputs, found)
            if self._now.text != ",":
                break
            self._take()
        missing = [name for name in inputs if name not in found]
        if missing and found.keys() <= set(inputs):
            raise _Refused(f"the input `{missing[0]}` of `{block.text}` is given no signal", block.at)
        return {name: found[name] for name in inputs if name in found}

    def _named_argument(self, block: _Token, inputs: tuple[str, ...], found: dict[str, SignalExpression]) -> None:
        name, equals = self._take(), self._take()
        if name.kind != "name" or equals.text != "=":
            raise _Refused("an input and its signal are wanted here, `name=signal`", name.at)
        if name.text not in inputs:
            self._unknown(name, "input", inputs, block.text)
        if name.text in found:
            raise _Refused(f"the input `{name.text}` is given twice", name.at, "id-duplicate")
        start = self._now.at
        found[name.text] = self._signal(self._sum(), start)

    def _output(self, block: _Token, outputs: tuple[str, ...]) -> str:
        if self._now.text != ".":
            if len(outputs) > 1:
                wanted = " or ".join(f"`.{name}`" for name in outputs)
                raise _Refused(f"`{block.text}` has several outputs: add {wanted} after the brackets", block.at)
            return outputs[0]
        self._take()
        name = self._take()
        if name.text not in outputs:
            self._unknown(name, "output", outputs, block.text)
        return name.text

    def _name(self, token: _Token) -> _Part:
        if token.text in self.signals:
            return SignalName(token.text, self.node.place_of(token.at))
        if token.text in self.context.ports and self._now.text != ".":
            raise _Refused(f"`{token.text}` is a block: apply it to a signal, `{token.text}(…)`", token.at)
        if self._now.text == "." and self.tokens[self.index + 1].kind == "name":
            self._take()
            self._take()
            return self._constant(token.at)
        if token.text in self.context.shared or token.text == "pi":
            return self._constant(token.at)
        self._unknown(token, "signal, input or shared parameter", (*self.names.signals, *self.names.inputs))
        return _Stranger(SignalName(token.text, self.node.place_of(token.at)))

    # --- parts --------------------------------------------------------------------------------------------

    def _constant(self, start: int) -> _Constant:
        """Read the text from `start` up to here as an expression."""
        last = self.tokens[self.index - 1]
        words = self.node.value[start : last.at + len(last.text)]
        inset = None if self.node.inset is None else self.node.inset + start
        return _Constant(Reader(self.context).expression(Text(self.node.spot, words, inset)))

    def _signal(self, part: _Part, at: int) -> SignalExpression:
        if isinstance(part, _Constant) and not is_read(part.expression):
            raise _Refused(None)
        if isinstance(part, _Constant):
            raise _Refused("a constant is no signal: constant values belong under `rest`", at)
        return part.name if isinstance(part, _Stranger) else part

    def _minus(self, part: _Part, at: int) -> _Part:
        if isinstance(part, _Constant):
            return _Constant(Negative(part.expression, offset=at))
        if isinstance(part, _Stranger):
            return part
        return self._scaled(Number(fmpq(-1)), part, at)

    def _scaled(self, factor: Expression, operand: SignalExpression, at: int) -> Scaled:
        return Scaled(factor, operand, self.node.place_of(at))

    # --- tokens -------------------------------------------------------------------------------------------

    @property
    def _now(self) -> _Token:
        return self.tokens[self.index]

    def _take(self) -> _Token:
        token = self.tokens[self.index]
        self.index = min(self.index + 1, len(self.tokens) - 1)
        return token

    def _enter(self, at: int) -> None:
        self.depth += 1
        if self.depth > DEEPEST:
            raise _Refused(f"more than {DEEPEST} brackets inside one another", at)

    def _close(self, opening: _Token) -> None:
        if self._now.text != ")":
            raise _Refused(f"the bracket opened at character {opening.at + 1} is not closed", opening.at)
        self._take()

    def _unknown(self, token: _Token, what: str, known: tuple[str, ...], owner: str | None = None) -> None:
        """Report a name; it is kept in the expression, where nothing is to be had from it."""
        self.context.unknown(what, token.text, known, self.node.place_of(token.at), owner)


def _factor(sign: str, constant: Expression) -> Expression:
    operator: Literal["/"] = "/"
    return constant if sign == "*" else Binary(operator, Number(fmpq(1)), constant)
