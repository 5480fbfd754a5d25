"""One tree from the files of a project: any file may hold any section, and ids are unique across all of them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from specgate.intake.collect import Collector
from specgate.intake.nodes import Entry, Node, Table, Text
from specgate.terms.findings import Related

NAMED = (
    "parameters",
    "subsystems",
    "loops",
    "requirements",
    "templates",
    "approximations",
    "evidence",
    "waivers",
    "documents",
    "masks",
    "cases",
)
"""Sections of named things: what several files hold is put together."""
ONE_NAMESPACE = ("subsystems", "loops", "requirements", "evidence", "waivers", "documents")
"""Sections whose ids must differ from each other's as well: they are referred to without saying which it is."""
KNOWN = frozenset(
    (
        *NAMED,
        "$schema",
        "specgate",
        "project",
        "include",
        "gate",
        "evaluate",
        "decision_rule",
        "model_agreement",
        "wording",
    )
)
"""All sections."""
_REPEATABLE = ("specgate", "include", "$schema")


def merged(roots: Iterable[Node], collector: Collector) -> Table:
    """Put the sections of all files (at least one) together; a second definition is reported with both places."""
    tables = [root for root in roots if isinstance(root, Table)]
    sections: dict[str, Entry] = {}
    for root in tables:
        for name, entry in root.entries.items():
            before = sections.get(name)
            sections[name] = entry if before is None else _both(name, before, entry, collector)
    return Table(tables[0].spot, sections)


def _both(name: str, before: Entry, entry: Entry, collector: Collector) -> Entry:
    """Return a section that two files hold."""
    if name in _REPEATABLE:
        return before
    if name not in NAMED:
        _twice(f"`{name}`", before.key, entry.key, collector)
        return before
    if not isinstance(before.value, Table) or not isinstance(entry.value, Table):
        return before if isinstance(before.value, Table) else entry
    together = dict(before.value.entries)
    for key, item in entry.value.entries.items():
        if key in together:
            _twice(f"`{key}`", together[key].key, item.key, collector)
        else:
            together[key] = item
    return Entry(before.key, Table(before.value.spot, together))


def _twice(what: str, first: Text, second: Text, collector: Collector) -> None:
    there = first.spot.place
    message = f"{what} is defined twice, first at {there}: remove or rename one"
    collector.error("id-duplicate", message, second.spot.place, Related(there, "first defined here"))


def check_namespace(root: Table, collector: Collector) -> None:
    """Report ids that two sections share."""
    seen: dict[str, Text] = {}
    for section in ONE_NAMESPACE:
        node = root.get(section)
        for key, _ in node.items() if isinstance(node, Table) else ():
            if key.value in seen:
                _twice(f"the id `{key.value}`", seen[key.value], key, collector)
            else:
                seen[key.value] = key


def readable(roots: Iterable[Node]) -> bool:
    """Whether all sections that declare names are there to be read, so that an unknown name is unknown indeed."""
    return all(_readable(root) for root in roots)


def _readable(root: Node) -> bool:
    if not isinstance(root, Table):
        return False
    named = [node for name in NAMED if (node := root.get(name)) is not None]
    return all(isinstance(node, Table) for node in named) and root.entries.keys() <= KNOWN


def section(root: Table, name: str) -> Mapping[str, Entry]:
    """Return the entries of a section of named things."""
    node = root.get(name)
    return node.entries if isinstance(node, Table) else {}
