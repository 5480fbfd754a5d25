"""The register of documents, the masks, cases that are kept for a later version, and how records are judged."""

from __future__ import annotations

from typing import Literal, cast

from flint import fmpq

from specgate.intake.context import Context, entries, items, table, text
from specgate.intake.nodes import Node, Number, Table, Text, as_kept
from specgate.intake.values import Reader
from specgate.project.types import Corner, DecisionRule, Kept, MaskDefinition, ModelAgreement
from specgate.terms.decimals import exact_decimal


def documents(node: Node | None) -> dict[str, Kept]:
    """Keep the list of documents."""
    return _section(node)


def masks(node: Node | None, context: Context) -> dict[str, MaskDefinition]:
    """Read the masks over time or frequency, those in which something was reported left out."""
    found = ((key.value, _mask(key, table(value), context)) for key, value in entries(node))
    return {name: mask for name, mask in found if mask is not None}


def _mask(key: Text, body: Table | None, context: Context) -> MaskDefinition | None:
    if body is None:
        return None
    over = text(body.get("over"))
    upper, lower = (_corners(body.get(side), context) for side in ("upper", "lower"))
    shapely = context.collector.shapely("masks", key.value)
    if not shapely or not (upper or lower) or over not in (None, "time", "frequency"):
        return None
    laid = cast('Literal["time", "frequency"] | None', over)
    forever = text(body.get("to")) == "forever"
    return MaskDefinition(key.value, laid, upper, lower, forever, key.spot.place)


def _corners(node: Node | None, context: Context) -> tuple[Corner, ...]:
    """Read `[[at, limit], ...]`."""
    pairs = (Reader(context).pair(point) for point in items(node))
    return tuple(Corner(*pair) for pair in pairs if pair is not None)


def cases(node: Node | None, context: Context) -> dict[str, Kept]:
    """Keep the named sets of parameter values."""
    reader = Reader(context)
    for _, case in entries(node):
        for parameter, value in entries(case):
            if reader.qualified(parameter.value) is None:
                context.unknown("parameter", parameter.value, reader.known(), parameter.spot.place)
            reader.value(value)
    return _section(node)


def decision_rule(node: Node | None) -> DecisionRule:
    """Read how results are compared with limits."""
    body = table(node)
    if body is None:
        return DecisionRule()
    guard = body.get("guard")
    if text(body.get("kind")) != "guarded_acceptance":
        return DecisionRule()
    return DecisionRule("guarded_acceptance", exact_decimal(guard.text) if isinstance(guard, Number) else fmpq(1))


def model_agreement(node: Node | None, context: Context) -> ModelAgreement | None:
    """Read how far a result may be from the computed value."""
    body = table(node)
    return None if body is None else ModelAgreement(Reader(context).under(body, "at_most"), body.spot.place)


def _section(node: Node | None) -> dict[str, Kept]:
    return {
        key.value: Kept(key.value, {name.value: as_kept(part) for name, part in value.items()}, key.spot.place)
        for key, value in entries(node)
        if isinstance(value, Table)
    }
