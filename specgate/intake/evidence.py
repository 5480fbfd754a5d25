"""Evidence and waivers: records of what was shown, and what is accepted instead."""

from __future__ import annotations

import hashlib
import posixpath
from collections.abc import Mapping
from contextlib import suppress
from typing import Literal, cast

from specgate.intake.context import Context, entries, table, text, texts
from specgate.intake.criteria import LIMITS, limit_of
from specgate.intake.nodes import Node, Table, Text, as_kept
from specgate.intake.values import Reader
from specgate.project.types import Aim, Evidence, Expiry, RecordFile, Waiver
from specgate.terms.sources import Source, SourceError


def evidence(node: Node | None, context: Context) -> dict[str, Evidence]:
    """Read the records, those in which something was reported left out."""
    found = ((key.value, _record(key, table(value), context)) for key, value in entries(node))
    return {name: one for name, one in found if one is not None}


def waivers(node: Node | None, context: Context) -> dict[str, Waiver]:
    """Read the accepted departures, those in which something was reported left out."""
    found = ((key.value, _waiver(key, table(value), context)) for key, value in entries(node))
    return {name: one for name, one in found if one is not None}


def digests(node: Node | None, source: Source) -> Mapping[str, str]:
    """Return the sha256 of each file of a record that the project holds, by its path in the project folder."""
    found: dict[str, str] = {}
    for _, value in entries(node):
        file = value.get("file") if isinstance(value, Table) else None
        path = _path(file) if isinstance(file, Text) else None
        if path is None or path in found:
            continue
        with suppress(SourceError):
            found[path] = hashlib.sha256(source.read(path)).hexdigest()
    return found


def _path(file: Text) -> str:
    return posixpath.normpath(posixpath.join(posixpath.dirname(file.spot.origin.path), file.value.strip()))


def _record(key: Text, body: Table | None, context: Context) -> Evidence | None:
    kind, reader = text(body.get("kind")) if body is not None else None, Reader(context)
    if body is None or kind is None:
        return None
    return Evidence(
        id=key.value,
        kind=kind,
        requirements=texts(body.get("requirement")),
        place=key.spot.place,
        title=text(body.get("title")),
        date=text(body.get("date")),
        design_revision=text(body.get("design_revision")),
        results=reader.several(body.get("results")),
        outcome=cast('Literal["meets", "does_not_meet"] | None', text(body.get("outcome"))),
        expanded_uncertainty=reader.optional(body.get("expanded_uncertainty")),
        aim=_aim(body),
        file=_file(body, context),
        source=text(body.get("source")),
    )


def _aim(body: Table) -> Aim:
    return Aim(text(body.get("measure")), text(body.get("on")))


def _file(body: Table, context: Context) -> RecordFile | None:
    file, digest = body.get("file"), text(body.get("digest"))
    if not isinstance(file, Text):
        return None
    path = _path(file)
    return RecordFile(path, None if digest is None else digest.lower(), context.digests.get(path), file.spot.place)


def _waiver(key: Text, body: Table | None, context: Context) -> Waiver | None:
    accepts = table(body.get("accepts")) if body is not None else None
    if body is None or accepts is None:
        return None
    reader = Reader(context)
    return Waiver(
        id=key.value,
        kind=cast('Literal["waiver", "deviation"]', text(body.get("kind"))),
        requirements=texts(body.get("requirement")),
        reason=text(body.get("reason")) or "",
        approved_by=text(body.get("approved_by")) or "",
        approved_on=text(body.get("approved_on")) or "",
        place=key.spot.place,
        limits=tuple(limit_of(kind, accepts, reader) for kind in LIMITS if kind in accepts.entries),
        standing=cast('Literal["out_of_range", "inconclusive"] | None', text(accepts.get("standing"))),
        outcome=text(accepts.get("outcome")) == "does_not_meet",
        expires=_expiry(body),
        scope=text(body.get("scope")),
        aim=_aim(body),
        accepts={name.value: as_kept(part) for name, part in accepts.items()},
    )


def _expiry(body: Table) -> Expiry | None:
    node = body.get("expires")
    if node is None:
        return None
    under = table(node)
    return Expiry(text(node), None) if under is None else Expiry(None, text(under.get("revision")))
