"""What was changed in the files, group by group, in words."""

from __future__ import annotations

from collections.abc import Sequence

from specgate.report.revisions.marks import Piece, marked
from specgate.report.words import spaced
from specgate.revisions.types import Change
from specgate.terms.records import record

TITLES = {
    "tool": "Tool",
    "definition": "Definitions",
    "project": "Title block",
    "policy": "Policy",
    "document": "Documents",
    "requirement": "Requirements",
    "parameter": "Parameters",
    "subsystem": "Subsystems",
    "loop": "Loops",
}
_GROUP_OF = {"criterion": "requirement", "response": "loop", "break": "loop"}
_HOW = {"changed": "", "reworded": ""}
"""Words for how something was changed, where the field that was changed does not say it all."""
TEXTS = ("text", "title", "rationale")
"""Fields that are shown word by word."""


@record
class ChangeRow:
    """One change; pieces: old and new text as one, where it is shown word by word."""

    name: str
    what: str
    how: str
    key: str
    old: str
    new: str
    pieces: tuple[Piece, ...]
    place: str


@record
class ChangeGroup:
    """The changes of one kind of thing."""

    title: str
    rows: tuple[ChangeRow, ...]


def groups(changes: Sequence[Change]) -> tuple[ChangeGroup, ...]:
    """Return all changes by kind; a criterion stands with its requirement, a response with its loop."""
    found: dict[str, list[Change]] = {kind: [] for kind in TITLES}
    for one in changes:
        found[_GROUP_OF.get(one.kind, one.kind)].append(one)
    return tuple(
        ChangeGroup(TITLES[kind], tuple(map(_row, sorted(some, key=lambda one: one.name))))
        for kind, some in found.items()
        if some
    )


def _row(one: Change) -> ChangeRow:
    where = one.new_location or one.old_location
    both = one.old is not None and one.new is not None
    return ChangeRow(
        name="" if one.kind in ("project", "tool") else one.name,
        what=_what(one),
        how=_HOW.get(one.how, one.how),
        key="worse" if one.how in ("loosened", "removed") else "better" if one.how == "tightened" else "changed",
        old=one.old or "",
        new=one.new or "",
        pieces=marked(one.old or "", one.new or "") if both and one.what in TEXTS else (),
        place="" if where is None else f"{where.path}:{where.line}",
    )


def _what(one: Change) -> str:
    kind = one.kind if one.kind in ("response", "break") else ""
    measure, of, rest = one.what.partition(" of ")
    return " ".join(filter(None, (kind, f"{spaced(measure)}{of}{rest}")))
