"""Requirements: trace, methods, criteria and what they rest on."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal, cast

from specgate.intake.budgets import budget
from specgate.intake.context import Context, items, table, text
from specgate.intake.criteria import basis, criterion, estimates_one
from specgate.intake.nodes import Entry, Items, Node, Spot, Table, Text, Truth, as_kept
from specgate.project.types import Basis, Criterion, Link, Method, NotApplicable, Requirement
from specgate.terms.places import Place

DecidedBy = Literal["criteria", "derived", "evidence"]


def requirement(entry: Entry, context: Context) -> Requirement | None:
    """Read one requirement as far as it can be read; None where it is no table."""
    node = table(entry.value)
    if node is None:
        return None
    criteria = [criterion(item, spot, context) for item, spot in _criteria(node)]
    found = tuple(item for item in criteria if item is not None)
    grounds = node.get("basis")
    rests_on = basis(grounds, context) if grounds is not None else None
    methods = list(_methods(node.get("verification"), context))
    verification = tuple(method for method in methods if method is not None)
    context.holes += len(found) < len(criteria) or len(verification) < len(methods)
    if len(found) == len(criteria) and not _supports(rests_on, found, context):
        rests_on = None
    shared = node.entries.get("budget")
    shares = budget(shared.value, shared.key.spot.place, context) if shared is not None else None
    context.holes += shared is not None and shares is None
    coverage = table(node.get("coverage"))
    return Requirement(
        id=entry.key.value,
        text=text(node.get("text")) or "",
        place=entry.key.spot.place,
        title=text(node.get("title")),
        rationale=text(node.get("rationale")),
        owner=text(node.get("owner")),
        derived_from=tuple(_links(node.get("derived_from"))),
        allocated_to=tuple(_links(node.get("allocated_to"))),
        verification=verification,
        criteria=found,
        basis=rests_on,
        decided_by=cast(DecidedBy, text(node.get("decided_by")) or "criteria"),
        coverage_complete=coverage is not None and _is_true(coverage.get("complete")),
        coverage=_kept(coverage),
        external=_kept_or_none(node.get("external")),
        not_applicable=_not_applicable(node.get("not_applicable")),
        budget=shares,
        text_place=None if (words := node.get("text")) is None else words.spot.place,
        template_place=_template(node),
    )


def _template(node: Table) -> Place | None:
    """Return where the text of the template begins that a requirement is made from."""
    keys = (entry.key.spot for entry in node.entries.values())
    return next((spot.place for spot in keys if spot.origin.template is not None), None)


def _criteria(node: Table) -> Iterator[tuple[Node, Spot]]:
    """Give each criterion with where it is reported: at its key, or where it begins in the list."""
    single = node.entries.get("criterion")
    if single is not None:
        yield single.value, single.key.spot
    several = node.get("criteria")
    if isinstance(several, Items):
        yield from ((item, item.spot) for item in several.nodes)


def _supports(rests_on: Basis | None, criteria: tuple[Criterion, ...], context: Context) -> bool:
    """See that an approximation on the requirement estimates exactly one of its criteria that has no basis itself."""
    if rests_on is None:
        return True
    return estimates_one(rests_on, [item.measure for item in criteria if item.basis is None], context)


def _methods(node: Node | None, context: Context) -> Iterator[Method | None]:
    for item in items(node):
        body = table(item)
        name = text(item) if body is None else text(body.get("method"))
        stage = body.get("stage") if body is not None else None
        if isinstance(stage, Text) and stage.value.strip() not in context.stages:
            context.unknown("stage", stage.value.strip(), context.stages, stage.spot.place)
            yield None
        else:
            yield Method(name, item.spot.place, text(stage)) if name is not None else None


def _links(node: Node | None) -> Iterator[Link]:
    for item in items(node):
        body = table(item)
        name = text(item) if body is None else text(body.get("id"))
        if name is not None:
            reaffirmed = body.get("reaffirmed") if body is not None else None
            yield Link(name, item.spot.place, {"reaffirmed": as_kept(reaffirmed)} if reaffirmed is not None else {})


def _not_applicable(node: Node | None) -> NotApplicable | None:
    body = table(node)
    if body is None:
        return None
    return NotApplicable(text(body.get("reason")) or "", text(body.get("approved_by")), text(body.get("approved_on")))


def _is_true(node: Node | None) -> bool:
    return isinstance(node, Truth) and node.value


def _kept(node: Table | None) -> dict[str, object]:
    return {} if node is None else {key.value: as_kept(value) for key, value in node.items()}


def _kept_or_none(node: Node | None) -> dict[str, object] | None:
    body = table(node)
    return None if body is None else _kept(body)
