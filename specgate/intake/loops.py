"""Loops: wiring, rest, breaks and responses."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.intake.context import Context, LoopNames, entries, items, keys, table, text, texts
from specgate.intake.nodes import Entry, Node, Number, Table, Text
from specgate.intake.signals import signal_expression
from specgate.intake.values import Reader
from specgate.project.types import (
    Break,
    Excitation,
    Loop,
    LoopInput,
    Response,
    Signal,
    Value,
)
from specgate.terms.findings import Related

_QUANTITIES = ("size", "slope", "curvature", "area", "duration", "amplitude", "frequency", "density", "at")


def names_of(node: Node) -> LoopNames:
    """Return the names that a loop declares."""
    loop = table(node) or Table(node.spot, {})
    inputs, signals, responses, breaks = (keys(loop.get(key)) for key in ("inputs", "signals", "responses", "breaks"))
    return LoopNames(inputs, signals, responses, breaks)


def loop(entry: Entry, context: Context) -> Loop | None:
    """Read one loop as far as it can be read; None where it is no table."""
    node = table(entry.value)
    if node is None:
        return None
    reading = _Loop(entry.key.value, node, context)
    inputs, signals = dict(reading.inputs()), dict(reading.signals())
    breaks, responses = dict(reading.breaks()), dict(reading.responses())
    rest = dict(reading.rest())
    reading.distinct()
    for name in inputs.keys() & signals.keys():  # which of the two is meant, nobody can tell
        del inputs[name], signals[name]
    sections: dict[str, Mapping[str, object]] = {
        "inputs": inputs,
        "signals": signals,
        "breaks": breaks,
        "responses": responses,
        "rest": rest,
    }
    context.holes += any(len(found) < len(keys(node.get(key))) for key, found in sections.items())
    return Loop(
        entry.key.value, inputs, signals, responses, breaks, rest, entry.key.spot.place, text(node.get("title"))
    )


class _Loop:
    """What is read of one loop; each part leaves out what was reported."""

    def __init__(self, name: str, node: Table, context: Context) -> None:
        self.name, self.node, self.context = name, node, context
        self.names = names_of(node)
        self.reader = Reader(context)

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
            value = self.reader.value(node)
            if self._known("signal or input", key, (*self.names.signals, *self.names.inputs)):
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
        """Read a response; names in it that the loop does not have are reported, and kept."""
        several = node.get("inputs")
        bodies = [node] if several is None else [table(item) or Table(item.spot, {}) for item in items(several)]
        excitations = [self._excitation(body) for body in bodies]
        to, reference = node.get("to"), node.get("reference")
        self._known("signal", to, self.names.signals)
        if isinstance(reference, Number) and reference.exact != 0:
            self.context.collector.error("schema-violation", "a reference is a signal, or 0", reference.spot.place)
            reference = None
        self._known("signal or input", reference, (*self.names.inputs, *self.names.signals))
        given = tuple(excitation for excitation in excitations if excitation is not None)
        shapely = self.context.collector.shapely("loops", self.name, "responses", key.value)
        if not shapely or not isinstance(to, Text) or len(given) < len(excitations) or not given:
            return None
        return Response(key.value, given, to.value.strip(), key.spot.place, text(reference), text(node.get("title")))

    def _excitation(self, node: Table) -> Excitation | None:
        source, kind = node.get("from"), text(node.get("input"))
        self._known("input", source, self.names.inputs)
        given = {name: self.reader.value(value) for name in _QUANTITIES if (value := node.get(name)) is not None}
        count_from = text(node.get("count_from"))
        options = {"count_from": count_from} if count_from is not None else {}
        if kind is None or not isinstance(source, Text):
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
        self.context.collector.error("id-duplicate", message, key.spot.place, related)
