"""Sections that are kept for a later version: validated now, quantities in them readable now."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal, cast

from specgate.intake.context import Context, entries, items, table, text
from specgate.intake.nodes import Items, Node, Table, Text, as_kept
from specgate.intake.values import Reader
from specgate.project.types import Corner, Kept, MaskDefinition

_LIMITS = ("at_most", "at_least", "between", "within", "of")


def evidence(node: Node | None, context: Context) -> dict[str, Kept]:
    """Keep the records of tests and reviews."""
    return _section(node, context, ("results", "expanded_uncertainty"))


def waivers(node: Node | None, context: Context) -> dict[str, Kept]:
    """Keep the accepted departures."""
    for _, waiver in entries(node):
        accepted = table(waiver.get("accepts")) if isinstance(waiver, Table) else None
        if accepted is not None:
            _readable(accepted, _LIMITS, context)
    return _section(node, context, ())


def documents(node: Node | None, context: Context) -> dict[str, Kept]:
    """Keep the list of documents."""
    return _section(node, context, ())


def masks(node: Node | None, context: Context) -> dict[str, MaskDefinition]:
    """Read the masks over time or frequency, those in which something was reported left out."""
    found = ((key.value, _mask(key, table(value), context)) for key, value in entries(node))
    return {name: mask for name, mask in found if mask is not None}


def _mask(key: Text, body: Table | None, context: Context) -> MaskDefinition | None:
    if body is None:
        return None
    over = text(body.get("over"))
    upper, lower = (_corners(body.get(side), context) for side in ("upper", "lower"))
    if upper is None or lower is None or not (upper or lower) or over not in (None, "time", "frequency"):
        return None
    laid = cast('Literal["time", "frequency"] | None', over)
    forever = text(body.get("to")) == "forever"
    return MaskDefinition(key.value, laid, upper, lower, forever, key.spot.place)


def _corners(node: Node | None, context: Context) -> tuple[Corner, ...] | None:
    """Read `[[at, limit], ...]`; None where one cannot be read."""
    pairs = [Reader(context).pair(point) for point in items(node)]
    return None if None in pairs else tuple(Corner(*pair) for pair in pairs if pair is not None)


def cases(node: Node | None, context: Context) -> dict[str, Kept]:
    """Keep the named sets of parameter values."""
    reader = Reader(context)
    for _, case in entries(node):
        for parameter, value in entries(case):
            if reader.qualified(parameter.value) is None:
                context.unknown("parameter", parameter.value, reader.known(), parameter.spot.place)
            reader.value(value)
    return _section(node, context, ())


def single(name: str, node: Node | None, context: Context) -> tuple[Kept, ...]:
    """Keep a section that is one table, such as `decision_rule`."""
    body = table(node)
    if body is None:
        return ()
    _readable(body, ("at_most",), context)
    return (Kept(name, {key.value: as_kept(value) for key, value in body.items()}, body.spot.place),)


def _section(node: Node | None, context: Context, quantities: tuple[str, ...]) -> dict[str, Kept]:
    return dict(_entries(node, context, quantities))


def _entries(node: Node | None, context: Context, quantities: tuple[str, ...]) -> Iterator[tuple[str, Kept]]:
    for key, value in entries(node):
        if isinstance(value, Table):
            _readable(value, quantities, context)
            content = {name.value: as_kept(part) for name, part in value.items()}
            yield key.value, Kept(key.value, content, key.spot.place)


def _readable(node: Table, quantities: tuple[str, ...], context: Context) -> None:
    """Report the quantities under these keys that cannot be read."""
    reader = Reader(context)
    for name in quantities:
        found = node.get(name)
        if isinstance(found, Items):
            reader.several(found)
        elif found is not None:
            reader.value(found)
