"""Loops: wiring, rest, breaks and responses."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.intake.context import Context, LoopNames, entries, items, keys, table, text, texts
from specgate.intake.nodes import Entry, Node, Number, Table, Text
from specgate.intake.signals import signal_expression
from specgate.intake.values import Reader
from specgate.project.types import (
    Break,
    Call,
    Excitation,
    Loop,
    LoopInput,
    Response,
    Scaled,
    Signal,
    SignalExpression,
    Sum,
    Value,
)
from specgate.terms.findings import Related

_QUANTITIES = ("size", "slope", "curvature", "area", "duration", "amplitude", "frequency", "density", "at")


def names_of(node: Node) -> LoopNames:
    """Return the names that a loop declares."""
    loop = table(node) or Table(node.spot, {})
    inputs, signals, responses, breaks = (keys(loop.get(key)) for key in ("inputs", "signals", "responses", "breaks"))
    return LoopNames(inputs, signals, responses, breaks)


def loop(entry: Entry, built: frozenset[str], context: Context) -> Loop | None:
    """Read one loop. None if something in it was reported, or a block that it uses is broken."""
    node = table(entry.value)
    if node is None:
        return None
    reading = _Loop(entry.key.value, node, built, context)
    inputs, signals = dict(reading.inputs()), dict(reading.signals())
    breaks, responses = dict(reading.breaks()), dict(reading.responses())
    rest = dict(reading.rest())
    reading.distinct()
    reading.blocks(signals)
    sections: dict[str, Mapping[str, object]] = {
        "inputs": inputs,
        "signals": signals,
        "breaks": breaks,
        "responses": responses,
        "rest": rest,
    }
    whole = all(len(found) == len(keys(node.get(key))) for key, found in sections.items())
    if not whole or not inputs or not signals or reading.broken:
        return None
    return Loop(
        entry.key.value, inputs, signals, responses, breaks, rest, entry.key.spot.place, text(node.get("title"))
    )


class _Loop:
    """What is read of one loop; each part leaves out what was reported."""

    def __init__(self, name: str, node: Table, built: frozenset[str], context: Context) -> None:
        self.name, self.node, self.built, self.context = name, node, built, context
        self.names = names_of(node)
        self.reader = Reader(context)
        self.broken = False

    def inputs(self) -> Iterator[tuple[str, LoopInput]]:
        for key, value in entries(self.node.get("inputs")):
            body = table(value)
            unit = self.context.unit(body.get("unit")) if body is not None else None
            if unit is not None:
                yield key.value, LoopInput(key.value, unit, key.spot.place)

    def signals(self) -> Iterator[tuple[str, Signal]]:
        # where the inputs cannot be read, to call a name unknown would mislead
        known = table(self.node.get("inputs")) is not None
        for key, value in entries(self.node.get("signals")) if known else ():
            if not isinstance(value, Text):
                continue
            expression = signal_expression(value, self.names, self.context)
            if expression is not None:
                yield key.value, Signal(key.value, expression, value.value.strip(), key.spot.place)

    def rest(self) -> Iterator[tuple[str, Value]]:
        for key, node in entries(self.node.get("rest")):
            known = self._known("signal or input", key, (*self.names.signals, *self.names.inputs))
            value = self.reader.value(node)
            if known and value is not None:
                yield key.value, value

    def breaks(self) -> Iterator[tuple[str, Break]]:
        for key, node in entries(self.node.get("breaks")):
            body = table(node) or Table(node.spot, {})
            at = node if isinstance(node, Text) else body.get("at")
            into, with_open = body.get("into"), body.get("with_open")
            users = (*self.names.signals, *self.context.ports)
            good = self._known("signal", at, self.names.signals)
            good = self._known("signal or block", into, users) and good
            others = [self._known("signal", item, self.names.signals) for item in items(with_open)]
            good = all(others) and good
            if good and isinstance(at, Text):
                yield key.value, Break(key.value, at.value.strip(), key.spot.place, text(into), texts(with_open))

    def responses(self) -> Iterator[tuple[str, Response]]:
        for key, node in entries(self.node.get("responses")):
            found = self._response(key, table(node) or Table(node.spot, {}))
            if found is not None:
                yield key.value, found

    def _response(self, key: Text, node: Table) -> Response | None:
        several = node.get("inputs")
        bodies = [node] if several is None else [table(item) or Table(item.spot, {}) for item in items(several)]
        excitations = [self._excitation(body, key) for body in bodies]
        given = tuple(excitation for excitation in excitations if excitation is not None)
        to, reference = node.get("to"), node.get("reference")
        good = self._known("signal", to, self.names.signals)
        if isinstance(reference, Number) and reference.exact != 0:
            self.context.collector.error("schema-violation", "a reference is a signal, or 0", reference.spot.place)
            good = False
        good = self._known("signal or input", reference, (*self.names.inputs, *self.names.signals)) and good
        if not good or not isinstance(to, Text) or len(given) < len(excitations) or not given:
            return None
        return Response(key.value, given, to.value.strip(), key.spot.place, text(reference), text(node.get("title")))

    def _excitation(self, node: Table, key: Text) -> Excitation | None:
        source, kind = node.get("from"), text(node.get("input"))
        good = self._known("input", source, self.names.inputs)
        written = {name: node.get(name) for name in _QUANTITIES if node.get(name) is not None}
        quantities = {name: self.reader.value(value) for name, value in written.items()}
        given = {name: value for name, value in quantities.items() if value is not None}
        count_from = text(node.get("count_from"))
        options = {"count_from": count_from} if count_from is not None else {}
        if not good or kind is None or not isinstance(source, Text) or len(given) < len(written):
            return None
        return Excitation(source.value.strip(), kind, given, options, source.spot.place)

    def _known(self, what: str, node: Node | None, names: tuple[str, ...]) -> bool:
        """Report a name that this loop does not have; what is left out, by it or by the loop, is reported elsewhere."""
        if not names or not isinstance(node, Text) or node.value.strip() in names:
            return True
        self.context.unknown(what, node.value.strip(), names, node.spot.place)
        return False

    # --- the loop as a whole ------------------------------------------------------------------------------

    def distinct(self) -> None:
        """See that inputs and signals, and responses and breaks, have names of their own."""
        for first, second in (("inputs", "signals"), ("responses", "breaks")):
            there, here = table(self.node.get(first)), table(self.node.get(second))
            if there is None or here is None:
                continue
            for name in (name for name in here.entries if name in there.entries):
                message = f"`{name}` is the name of one of the {first} as well: each needs its own"
                related = Related(there.entries[name].key.spot.place, f"one of the {first}")
                self._duplicate(message, here.entries[name].key, related)

    def _duplicate(self, message: str, key: Text, related: Related) -> None:
        self.broken = True
        self.context.collector.error("id-duplicate", message, key.spot.place, related)

    def blocks(self, signals: dict[str, Signal]) -> None:
        """See whether a block that is used could not be built; that has been reported."""
        used = {call.subsystem for signal in signals.values() for call in _calls(signal.expression)}
        self.broken = self.broken or not used <= self.built


def _calls(expression: SignalExpression) -> Iterator[Call]:
    """Give all calls in an expression, the outer ones first."""
    match expression:
        case Call(arguments=arguments):
            yield expression
            for argument in arguments.values():
                yield from _calls(argument)
        case Scaled(operand=operand):
            yield from _calls(operand)
        case Sum(terms=terms):
            for term in terms:
                yield from _calls(term)
