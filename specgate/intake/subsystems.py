"""Parameters and subsystems."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal, cast

from specgate.intake.context import Context, Ports, entries, keys, table, text
from specgate.intake.models import model
from specgate.intake.nodes import Entry, Node, Table
from specgate.intake.values import Reader
from specgate.project.types import Model, Parameter, Pedigree, Port, StandIn, Subsystem, UnreadModel
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
        found[key.value] = _parameter(value, qualified, Reader(context, scope))
    return found


def _parameter(node: Node, qualified: str, reader: Reader) -> Parameter:
    formula = isinstance(node, Table) and node.get("formula") is not None
    value = reader.sourced(node, "formula") if isinstance(node, Table) and formula else reader.value(node)
    title = text(node.get("title")) if isinstance(node, Table) else None
    return Parameter(qualified, value, formula, node.spot.place, title)


# --- subsystems ----------------------------------------------------------------------------------------------


def subsystem(entry: Entry, context: Context) -> Subsystem | None:
    """Read one subsystem as far as it can be read; None where it is no table."""
    name, node = entry.key.value, table(entry.value)
    if node is None:
        return None
    reader = Reader(context, name)
    own = parameters(node.get("parameters"), name, context)
    inputs, outputs = dict(_ports(node, "input", reader)), dict(_ports(node, "output", reader))
    written = node.entries.get("model")
    return Subsystem(
        name=name,
        inputs=inputs,
        outputs=outputs,
        model=_model(node, (inputs, outputs), reader),
        place=entry.key.spot.place,
        model_place=(written or entry).key.spot.place,
        title=text(node.get("title")),
        owner=text(node.get("owner")),
        realised=cast('Literal["software", "hardware"] | None', text(node.get("realised"))),
        parameters=own,
        dead_time=reader.optional(body.get("dead_time")) if (body := table(node.get("model"))) is not None else None,
        separate_instances=text(node.get("instances")) == "separate",
        pedigree=_pedigree(node),
        valid_to=reader.optional(node.get("valid_to")),
        stands_for=_stand_in(node, reader),
    )


def _model(node: Table, read: tuple[dict[str, Port], dict[str, Port]], reader: Reader) -> Model:
    """Read the model; it stands for nothing where its shape is wrong, or a port that it leads to is not known."""
    ports, body = reader.context.ports[str(reader.scope)], table(node.get("model"))
    made = model(body, reader, ports) if body is not None else None
    shapely = reader.context.collector.shapely("subsystems", str(reader.scope), "model")
    sides = zip(read, (ports.inputs, ports.outputs), strict=True)
    if made is None or not shapely or not all(found and len(found) == len(declared) for found, declared in sides):
        reader.context.holes += 1
        return UnreadModel()
    return made


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
    if node is None or unit is None:
        reader.context.holes += 1
        return None
    ranges = {key: reader.pair(node.get(key)) for key in ("linear_range", "rate_range", "span")}
    return Port(name, unit, entry.key.spot.place, **ranges)


def _pedigree(node: Table) -> Pedigree | None:
    entry = node.entries.get("pedigree")
    body = table(entry.value) if entry is not None else None
    if entry is None or body is None:
        return None
    kind = cast('Literal["identified", "physical_law", "data_sheet", "assumed"]', text(body.get("kind")))
    return Pedigree(kind, text(body.get("from")), entry.key.spot.place)


def _stand_in(node: Table, reader: Reader) -> StandIn | None:
    """Read what a block stands for. None if there is nothing to read, or it stands for nothing that is known."""
    entry = node.entries.get("stands_for")
    body = table(entry.value) if entry is not None else None
    if entry is None or body is None:
        return None
    place, collector = entry.key.spot.place, reader.context.collector
    sampled, delay = (reader.optional(body.get(key)) for key in ("sampled", "delay"))
    if sampled is None and delay is None:
        message = "`stands_for` says neither a sampling period (`sampled: 1 ms`) nor a dead time (`delay: 0.5 ms`)"
        collector.error("schema-violation", message, place)
        return None
    by = text(body.get("by"))
    if by is not None and by not in STAND_INS:
        reader.context.unknown("approximation by which a block stands for something else", by, STAND_INS, place)
        return None
    return StandIn(sampled, delay, by, place)
