"""Quantities and expressions: from a node to a `Value`, names and units checked."""

from __future__ import annotations

from dataclasses import replace
from typing import Literal, cast

from flint import fmpq

from specgate.intake.context import Context, items, text
from specgate.intake.nodes import Items, Node, Number, Table, Text
from specgate.intake.traps import scalar_hint
from specgate.project.types import Tolerance, Value
from specgate.terms import expressions
from specgate.terms.expressions import Expression, ExpressionError, PercentOf, Unread, is_read
from specgate.terms.records import record
from specgate.terms.trees import ExpressionUnitError

SIGNAL_WORDS = frozenset({"span", "change"})
"""What `2 % of …` may name beside a parameter."""


@record
class Reader:
    """Reads values; `scope` is the subsystem whose own parameters may be read by their short names.

    Where something is reported, what stands for it is a value that could not be read (`Unread`), so that reading goes
    on and what rests on it stays silent.
    """

    context: Context
    scope: str | None = None

    def value(self, node: Node) -> Value:
        """Read a quantity, a number or an expression, or a table with `value`, `source` and `tolerance`."""
        if isinstance(node, Table):
            return self.sourced(node, "value")
        expression = self.expression(node) if isinstance(node, Text | Number) else self._hole()
        return Value(expression, text(node) or "", node.spot.place)

    def optional(self, node: Node | None) -> Value | None:
        """Read a value that may be left out."""
        return None if node is None else self.value(node)

    def under(self, node: Table, key: str) -> Value:
        """Read the value under a key, which the shape of the table asks for."""
        written = node.get(key)
        return Value(self._hole(), "", node.spot.place) if written is None else self.value(written)

    def sourced(self, node: Table, key: str) -> Value:
        """Read the value under `key` with the source and the tolerance beside it."""
        return replace(self.under(node, key), source=text(node.get("source")), tolerance=self.tolerance(node))

    def several(self, node: Node | None) -> tuple[Value, ...]:
        """Read a list of values; none where there is no list."""
        if isinstance(node, Items):
            return tuple(self.value(item) for item in node.nodes)
        self.context.holes += node is not None
        return ()

    def pair(self, node: Node | None) -> tuple[Value, Value] | None:
        """Read `[low, high]`; None where it is left out or no pair."""
        found = self.several(node)
        if len(found) == 2:
            return found[0], found[1]
        self.context.holes += node is not None
        return None

    def unread(self, node: Node) -> Value:
        """Return a value that stands for something that was reported at a node."""
        return Value(self._hole(), text(node) or "", node.spot.place)

    def expression(self, node: Text | Number) -> Expression:
        """Read an expression and see that every name in it is a parameter."""
        parsed = self.parsed(node)
        return parsed if parsed is not None and self._named(parsed, node) else self._hole()

    def _hole(self) -> Expression:
        self.context.holes += 1
        return Unread()

    def parsed(self, node: Text | Number) -> Expression | None:
        """Read an expression whatever the names in it; None where something is wrong, which is reported once."""
        if node.spot in self.context.collector.unreadable:
            return None
        written = node.value if isinstance(node, Text) else node.text
        try:
            parsed = self.context.parse(written)
        except ExpressionError as error:
            self._unreadable(node, error)
            return None
        self.context.units_read.update(units_of(parsed))
        return parsed

    def _unreadable(self, node: Text | Number, error: ExpressionError) -> None:
        if isinstance(error, ExpressionUnitError) and self.context.loses(text(node) or ""):
            return
        rule = "unit-unknown" if isinstance(error, ExpressionUnitError) else "schema-violation"
        hint = scalar_hint(node.value) if isinstance(node, Text) else None
        place = node.place_of(error.offset) if isinstance(node, Text) else node.spot.place
        message = f"`{_cut(text(node) or '')}`: {error.message}" if text(node) else error.message
        self.context.collector.error(rule, hint or message, place)

    def _named(self, parsed: Expression, node: Text | Number) -> bool:
        """Report the names that are no parameters; return whether all can be read."""
        good = True
        for reference in expressions.references(parsed):
            if isinstance(reference, PercentOf) and reference.name in SIGNAL_WORDS:
                continue
            qualified = self.qualified(reference.name)
            if qualified is None:
                place = node.place_of(reference.offset) if isinstance(node, Text) else node.spot.place
                self.context.unknown("parameter", reference.name, self.known(), place)
            good = good and qualified is not None
        return good

    def qualified(self, name: str) -> str | None:
        """Return the full name of the parameter that `name` means here."""
        own = self.context.own
        if self.scope is not None and name in own.get(self.scope, ()):
            return f"{self.scope}.{name}"
        if name in self.context.shared:
            return name
        subsystem, _, local = name.partition(".")
        return name if local in own.get(subsystem, ()) else None

    def known(self) -> list[str]:
        """Return the names that may be read here."""
        own = sorted(self.context.own.get(self.scope, ())) if self.scope else []
        others = [f"{block}.{name}" for block, names in self.context.own.items() for name in sorted(names)]
        return [*own, *sorted(self.context.shared), *others]

    # --- tolerances -----------------------------------------------------------------------------------------

    def tolerance(self, node: Table) -> Tolerance | None:
        """Read the tolerance in a table: `8 %`, `5 ms`, or `[-10 %, +25 %]`, with its distribution."""
        written = node.get("tolerance")
        if written is None:
            return None
        several = not isinstance(written, Text | Number)
        sides = [self.expression(side) for side in _scalars(written)]
        if not sides or not all(is_read(side) for side in sides):
            self.context.holes += 1
            return None
        upper = sides[-1]
        lower = sides[0] if several else negated(upper)
        relative = [_relative(side) for side in (lower, upper)]
        if relative[0] is not relative[1]:
            self._refuse("both deviations are relative with %, or both have a unit", written)
            return None
        if not _sign_is(lower, -1) or not _sign_is(upper, 1):
            self._refuse("a tolerance is a positive deviation, or `[-10 %, +25 %]`: first down, then up", written)
            return None
        kind = cast('Literal["uniform", "triangular", "normal"] | None', text(node.get("distribution")))
        factor = node.get("coverage_factor")
        covered = self.expression(factor) if isinstance(factor, Text | Number) else None
        shown = ", ".join(text(side) or "" for side in _scalars(written))
        return Tolerance(lower, upper, relative[0], f"[{shown}]" if several else shown, kind, covered)

    def _refuse(self, message: str, node: Node) -> None:
        self.context.holes += 1
        self.context.collector.error("schema-violation", message, node.spot.place)


def units_of(expression: Expression) -> list[str]:
    """Return the units in an expression as they were written."""
    found = [node.unit.symbol for node in expression.walk() if isinstance(node, expressions.Number) and node.unit]
    percent = ["%" for node in expression.walk() if isinstance(node, PercentOf)]
    return found + percent


def negated(expression: Expression) -> Expression:
    """Return minus an expression; the sign of a single number belongs to the number."""
    if isinstance(expression, expressions.Number):
        return replace(expression, value=-expression.value)
    return expressions.Negative(expression, offset=expression.offset)


def whole(number: int, node: Node) -> Value:
    """Return a whole number that stands for something left out at a node."""
    return Value(expressions.Number(fmpq(number)), str(number), node.spot.place)


def _scalars(node: Node) -> list[Text | Number]:
    nodes = (node,) if isinstance(node, Text | Number) else items(node)
    return [item for item in nodes if isinstance(item, Text | Number)]


def _relative(expression: Expression) -> bool:
    unit = expressions.literal_unit(expression)
    return unit is not None and unit.kind == "percent"


def _sign_is(expression: Expression, sign: int) -> bool:
    """Whether a number does not have the other sign; an expression may have any."""
    return not isinstance(expression, expressions.Number) or expression.value * sign >= 0


def _cut(words: str) -> str:
    return words if len(words) <= 60 else words[:59] + "…"
