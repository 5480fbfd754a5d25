"""Budgets: who takes a share of a limit, and how shares add up."""

from __future__ import annotations

from collections.abc import Iterator
from typing import cast

from flint import fmpq

from specgate.intake.context import Context, entries, items, table, text
from specgate.intake.criteria import LimitKind, limit_of
from specgate.intake.nodes import Node, Number, Table, Text
from specgate.intake.values import Reader
from specgate.project.types import Aim, BlockShare, Budget, Share
from specgate.project.types.budgets import Combination
from specgate.terms.decimals import exact_decimal
from specgate.terms.places import Place

_LIMITS: tuple[LimitKind, ...] = ("at_most", "at_least", "between")


def budget(node: Node | None, place: Place, context: Context) -> Budget | None:
    """Read a budget. None if there is none, or something in it was reported."""
    body, reader = table(node), Reader(context)
    if body is None:
        return None
    reserve, frequency = (reader.optional(body.get(key)) for key in ("reserve", "frequency"))
    limits = [limit_of(kind, body, reader) for kind in _LIMITS if kind in body.entries]
    blocks = list(_blocks(body.get("of_blocks"), context, reader))
    if None in blocks:
        return None
    return Budget(
        combine=cast("Combination", text(body.get("combine")) or "sum"),
        place=place,
        shares=tuple(_shares(body.get("of"))),
        blocks=tuple(block for block in blocks if block is not None),
        frequency=frequency,
        level=_level(body.get("level")),
        reserve=reserve,
        limit=limits[0] if limits else None,
    )


def _shares(node: Node | None) -> Iterator[Share]:
    for item in items(node):
        body = table(item)
        name = text(item) if body is None else text(body.get("id"))
        if name is None:
            continue
        if body is None:
            yield Share(name, item.spot.place)
        else:
            yield _share(name, body)


def _share(name: str, body: Table) -> Share:
    factor = body.get("factor")
    return Share(
        id=name,
        place=body.spot.place,
        factor=exact_decimal(factor.text) if isinstance(factor, Number) else fmpq(1),
        level=_level(body.get("level")),
        mean=text(body.get("as")) == "mean",
        group=text(body.get("group")),
        aim=Aim(text(body.get("measure")), text(body.get("on"))),
    )


def _level(node: Node | None) -> fmpq | None:
    """Return the number in `2 sigma`."""
    written = text(node)
    return None if written is None else exact_decimal(written.removesuffix("sigma").strip())


def _blocks(node: Node | None, context: Context, reader: Reader) -> Iterator[BlockShare | None]:
    named: list[tuple[Text, Node | None]] = [(item, None) for item in items(node) if isinstance(item, Text)]
    named += list(entries(node))
    for key, value in named:
        name = key.value.strip()
        if name not in context.ports:
            context.unknown("subsystem", name, context.ports, key.spot.place)
            yield None
            continue
        share = None if value is None else reader.value(value)
        yield None if value is not None and share is None else BlockShare(name, share, key.spot.place)
