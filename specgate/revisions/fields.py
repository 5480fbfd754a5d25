"""Which fields of a Review somebody declared, and what hangs on them; everything else in it is computed.

A test holds every field of the Review's records against these tables, so that a new field is placed in one of them.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

from specgate.review.types import Amount, RecordFileReview
from specgate.revisions.said import amount, said
from specgate.revisions.types import Change
from specgate.terms.records import record


@record
class Declared:
    """A declared field: its name, whether a result can rest on it, and the word for a change of it.

    of: what is compared and shown of its value.
    """

    name: str
    bears: bool = True
    how: str = "changed"
    of: Callable[[Any], Any] = lambda value: value


def _stages(methods: Any) -> Any:
    return tuple(f"{one.method} at {one.stage}" if one.stage else one.method for one in methods)


def _records(records: Any) -> Any:
    """Return what is stated in each record, without what it shows."""
    return tuple(_stated(one, _RECORD) for one in records)


def _waivers(waivers: Any) -> Any:
    """Return what is stated in each waiver, without what it excuses."""
    return tuple(_stated(one, _WAIVER) for one in waivers)


_RECORD = (
    "id",
    "kind",
    "title",
    "date",
    "design_revision",
    "outcome",
    "results",
    "expanded_uncertainty",
    "file",
    "source",
)
_WAIVER = ("id", "kind", "reason", "scope", "accepts", "approved_by", "approved_on", "expires")


def _budget(budget: Any) -> Any:
    """Return how a budget is shared, without what the shares come to."""
    if budget is None:
        return None
    shares = tuple(_stated(one, ("id", "factor", "level", "group", "mean")) for one in budget.shares)
    return {**_stated(budget, ("combine", "level", "reserve", "frequency")), "of": shares}


def _stated(one: Any, keys: tuple[str, ...]) -> dict[str, Any]:
    found = {key: getattr(one, key) for key in keys}
    return {key: _written(value) for key, value in found.items() if value not in (None, ())}


def _written(value: Any) -> Any:
    if isinstance(value, Amount):
        return amount(value)
    if isinstance(value, RecordFileReview):
        return value.path if value.digest is None else f"{value.path} ({value.digest[:12]}…)"
    return tuple(map(_written, value)) if isinstance(value, tuple) else value


REQUIREMENT = (
    Declared("text", bears=False, how="reworded"),
    Declared("title", bears=False, how="reworded"),
    Declared("rationale", bears=False, how="reworded"),
    Declared("owner", bears=False),
    Declared("derived_from"),
    Declared("allocated_to", bears=False),
    Declared("decided_by"),
    Declared("methods", of=_stages),
    Declared("evidence", of=_records),
    Declared("waivers", of=_waivers),
    Declared("budget", of=_budget),
    Declared("not_applicable"),
    Declared("external"),
    Declared("coverage"),
)
CRITERION = (Declared("arguments"), Declared("evaluate"), Declared("mask"))
PARAMETER = (
    Declared("value", of=str),
    Declared("tolerance"),
    Declared("source", bears=False),
)
SUBSYSTEM = (
    Declared("title", bears=False, how="reworded"),
    Declared("owner", bears=False),
    Declared("inputs"),
    Declared("outputs"),
    Declared("model"),
    Declared("realised"),
    Declared("ranges"),
    Declared("dead_time"),
    Declared("model_claims"),
)
LOOP = (
    Declared("title", bears=False, how="reworded"),
    Declared("wiring"),
    Declared("inputs"),
    Declared("rest"),
)
RESPONSE = (Declared("from_"), Declared("to"), Declared("input"))
BREAK = (Declared("at"),)
PROJECT = (
    Declared("id", bears=False),
    Declared("title", bears=False, how="reworded"),
    Declared("revision"),
    Declared("date"),
    Declared("stage"),
    Declared("stages"),
    Declared("sign_off", bears=False),
)
POLICY = (
    Declared("hold_on", bears=False),
    Declared("evaluate"),
    Declared("guard"),
    Declared("model_agreement", bears=False),
    Declared("today"),
)
SAID_AS = {"from_": "from", "methods": "verification"}
"""Names of fields in the files, where they differ."""


def changes(
    kind: str, name: str, fields: tuple[Declared, ...], old: Any, new: Any, prefix: str = ""
) -> Iterator[Change]:
    """Give the declared fields in which two records of one kind differ."""
    for field in fields:
        before, after = field.of(getattr(old, field.name)), field.of(getattr(new, field.name))
        if before != after:
            what = prefix + SAID_AS.get(field.name, field.name)
            was, now = _unlike(before, after)
            places = located(old), located(new)
            yield Change(kind, name, what, field.how, said(was), said(now), field.bears, *places)


def _unlike(before: Any, after: Any) -> tuple[Any, Any]:
    """Return two values, of mappings only the entries that are not the same."""
    if not (isinstance(before, Mapping) and isinstance(after, Mapping)):
        return before, after
    same = {key for key in before.keys() & after.keys() if before[key] == after[key]}
    kept = [{key: part for key, part in side.items() if key not in same} for side in (before, after)]
    return kept[0], kept[1]


def come_and_gone(kind: str, old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[Change]:
    """Give the names that stand on one side only."""
    for name in sorted(old.keys() ^ new.keys()):
        gone = name in old
        places = (located(old[name]), None) if gone else (None, located(new[name]))
        yield Change(kind, name, "", "removed" if gone else "added", None, None, True, *places)


def located(thing: Any) -> Any:
    """Return where a record stands in the files, None where it does not say."""
    return getattr(thing, "location", None)
