"""Parameters and subsystems."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Literal, cast

from specgate.intake.collect import Collector
from specgate.intake.context import Context, Ports, entries, keys, table, text
from specgate.intake.models import model
from specgate.intake.nodes import Entry, Node, Number, Table, Text
from specgate.intake.values import Reader
from specgate.project.types import Parameter, Pedigree, Port, StandIn, Subsystem
from specgate.terms import expressions
from specgate.terms.units import RESERVED

STAND_INS = ("hold_as_delay", "fast_sampling_as_continuous", "pade_dead_time")
"""Approximations by which a continuous block stands for something else."""


def ports_of(node: Node) -> Ports:
    """Return the names of the inputs and outputs that a subsystem declares; a lone one is named after its side."""
    sides = table(node) or Table(node.spot, {})
    inputs = ("input",) if sides.get("input") is not None else keys(sides.get("inputs"))
    outputs = ("output",) if sides.get("output") is not None else keys(sides.get("outputs"))
    return Ports(inputs, outputs)


# --- parameters ----------------------------------------------------------------------------------------------


def find_broken(declared: Mapping[str, tuple[Node, str | None]], context: Context) -> None:
    """Mark the parameters that cannot be read, and those whose formula reads one of them.

    declared: node and subsystem by qualified name. Nothing is reported here: `parameter` does that.
    """
    quiet = Context(Collector(), context.units, context.shared, context.own, parsed=context.parsed)
    readers: dict[str, list[str]] = {}
    waiting: list[str] = []
    for name, (node, scope) in declared.items():
        if quiet.collector.full:
            return
        reader, written = Reader(quiet, scope), _written(node)
        parsed = reader.parsed(written) if written is not None else None
        reads = [reader.qualified(read) for read in expressions.names(parsed)] if parsed is not None else [None]
        if None in reads:
            waiting.append(name)
        for read in reads:
            readers.setdefault(read or "", []).append(name)
    while waiting:
        name = waiting.pop()
        if name not in context.broken:
            context.broken.add(name)
            waiting += readers.get(name, [])


def _written(node: Node) -> Text | Number | None:
    if isinstance(node, Table):
        written = node.get("formula") if node.get("value") is None else node.get("value")
        return written if isinstance(written, Text | Number) else None
    return node if isinstance(node, Text | Number) else None


def parameters(node: Node | None, scope: str | None, context: Context) -> dict[str, Parameter]:
    """Read the parameters of the project (scope None) or of a subsystem, by their names as written."""
    found: dict[str, Parameter] = {}
    for key, value in entries(node):
        if context.collector.full:
            break
        qualified = f"{scope}.{key.value}" if scope else key.value
        if context.units.is_unit(key.value) or key.value in RESERVED:
            what = "a unit" if context.units.is_unit(key.value) else "a word of the format"
            message = f"a parameter cannot be named `{key.value}`: that is {what}"
            context.collector.error("id-duplicate", message, key.spot.place)
        parameter = _parameter(key, value, qualified, Reader(context, scope))
        if parameter is None:
            context.broken.add(qualified)
        else:
            found[key.value] = parameter
    return found


def _parameter(key: Text, node: Node, qualified: str, reader: Reader) -> Parameter | None:
    formula = isinstance(node, Table) and node.get("formula") is not None
    value = reader.sourced(node, "formula") if isinstance(node, Table) and formula else reader.value(node)
    if value is None or qualified in reader.context.broken:
        return None
    title = text(node.get("title")) if isinstance(node, Table) else None
    return Parameter(qualified, value, formula, node.spot.place, title)


# --- subsystems ----------------------------------------------------------------------------------------------


def subsystem(entry: Entry, context: Context) -> Subsystem | None:
    """Read one subsystem. None if something in it was reported."""
    name, node = entry.key.value, table(entry.value)
    if node is None:
        return None
    reader = Reader(context, name)
    own = parameters(node.get("parameters"), name, context)
    inputs, outputs = dict(_ports(node, "input", reader)), dict(_ports(node, "output", reader))
    body = table(node.get("model"))
    read = model(body, reader, context.ports[name]) if body is not None else None
    dead_time_node = body.get("dead_time") if body is not None else None
    dead_time = reader.value(dead_time_node)
    valid_to = reader.value(node.get("valid_to"))
    stands_for = _stand_in(node, reader)
    ports = context.ports[name]
    whole = len(own) == len(keys(node.get("parameters"))) and (valid_to or not node.get("valid_to"))
    whole = whole and (len(inputs), len(outputs)) == (len(ports.inputs), len(ports.outputs))
    whole = whole and (stands_for is not None or not node.get("stands_for"))
    if not whole or not inputs or not outputs or body is None or read is None or (dead_time_node and not dead_time):
        return None
    return Subsystem(
        name=name,
        inputs=inputs,
        outputs=outputs,
        model=read,
        place=entry.key.spot.place,
        model_place=node.entries["model"].key.spot.place,
        title=text(node.get("title")),
        owner=text(node.get("owner")),
        realised=cast('Literal["software", "hardware"] | None', text(node.get("realised"))),
        parameters=own,
        dead_time=dead_time,
        separate_instances=text(node.get("instances")) == "separate",
        pedigree=_pedigree(node),
        valid_to=valid_to,
        stands_for=stands_for,
    )


def _ports(node: Table, side: str, reader: Reader) -> Iterator[tuple[str, Port]]:
    alone = node.get(side)
    named = ((entry.key.value, entry) for entry in _table_entries(node.get(f"{side}s")))
    for name, entry in [(side, node.entries[side])] if alone is not None else named:
        port = _port(name, entry, reader)
        if port is not None:
            yield name, port


def _table_entries(node: Node | None) -> tuple[Entry, ...]:
    return tuple(node.entries.values()) if isinstance(node, Table) else ()


def _port(name: str, entry: Entry, reader: Reader) -> Port | None:
    node = table(entry.value)
    unit = reader.context.unit(node.get("unit")) if node is not None else None
    if node is None:
        return None
    ranges = {}
    for key in ("linear_range", "rate_range", "span"):
        if node.get(key) is not None:
            ranges[key] = reader.pair(node.get(key))
    if unit is None or None in ranges.values():
        return None
    return Port(name, unit, entry.key.spot.place, **ranges)


def _pedigree(node: Table) -> Pedigree | None:
    entry = node.entries.get("pedigree")
    body = table(entry.value) if entry is not None else None
    if entry is None or body is None:
        return None
    kind = cast('Literal["identified", "physical_law", "data_sheet", "assumed"]', text(body.get("kind")))
    return Pedigree(kind, text(body.get("from")), entry.key.spot.place)


def _stand_in(node: Table, reader: Reader) -> StandIn | None:
    """Read what a block stands for. None if there is nothing to read, or something in it was reported."""
    entry = node.entries.get("stands_for")
    body = table(entry.value) if entry is not None else None
    if entry is None or body is None:
        return None
    place, collector = entry.key.spot.place, reader.context.collector
    sampled, delay = (reader.value(body.get(key)) for key in ("sampled", "delay"))
    if body.get("sampled") is None and body.get("delay") is None:
        message = "`stands_for` says neither a sampling period (`sampled: 1 ms`) nor a dead time (`delay: 0.5 ms`)"
        collector.error("schema-violation", message, place)
        return None
    by = text(body.get("by"))
    if by is not None and by not in STAND_INS:
        reader.context.unknown("approximation by which a block stands for something else", by, STAND_INS, place)
        return None
    missing = [key for key, value in (("sampled", sampled), ("delay", delay)) if body.get(key) and value is None]
    return None if missing else StandIn(sampled, delay, by, place)
