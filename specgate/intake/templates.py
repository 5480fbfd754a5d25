"""Requirement templates: `{use: NAME, with: {…}}` becomes the requirement that it stands for."""

from __future__ import annotations

import re
from collections.abc import Mapping

from specgate.intake.collect import Collector
from specgate.intake.context import table, text
from specgate.intake.nodes import Broken, Entry, Items, Node, Nothing, Number, Origin, Spot, Table, Text, Truth
from specgate.terms.findings import Related
from specgate.terms.places import Place

_PLACEHOLDER = re.compile(r"\{([A-Za-z_][A-Za-z0-9_]*)\}", re.ASCII)


def expand(root: Node, templates: Mapping[str, Entry], collector: Collector, *, all_known: bool = True) -> Node:
    """Return a file's tree with every requirement that uses a template written out.

    Keys of the requirement itself come before those of the template. What is wrong is reported, and that requirement
    stays unreadable for what follows. all_known: whether `templates` are all that the project has.
    """
    section = root.get("requirements") if isinstance(root, Table) else None
    if not isinstance(root, Table) or not isinstance(section, Table):
        return root
    entries = {name: _expanded(entry, templates, collector, all_known) for name, entry in section.entries.items()}
    written_out = Table(section.spot, entries, section.braces)
    key = root.entries["requirements"].key
    return Table(root.spot, {**root.entries, "requirements": Entry(key, written_out)}, root.braces)


def _expanded(entry: Entry, templates: Mapping[str, Entry], collector: Collector, all_known: bool) -> Entry:
    node = entry.value
    use = node.get("use") if isinstance(node, Table) else None
    name = text(use)
    if not isinstance(node, Table) or use is None or name is None:
        return entry
    template = templates.get(name)
    if template is None and not all_known:
        return Entry(entry.key, Broken(node.spot))
    if template is None:
        close = collector.nearest(name, templates)
        ending = f": did you mean `{close}`?" if close else ""
        collector.error("name-unknown", f"there is no template `{name[:80]}`{ending}", use.spot.place)
        return Entry(entry.key, Broken(node.spot))
    given = table(node.get("with"))
    body = _Filling(name, given, use.spot.place, collector).fill(template.value)
    if not isinstance(body, Table):
        return Entry(entry.key, Broken(node.spot))
    own = {key: value for key, value in node.entries.items() if key not in ("use", "with")}
    return Entry(entry.key, Table(node.spot, {**body.entries, **own}, node.braces))


class _Filling:
    """Puts the values of one use into a template."""

    def __init__(self, template: str, given: Table | None, via: Place, collector: Collector) -> None:
        self.given: Mapping[str, Entry] = given.entries if given is not None else {}
        self.template, self.via, self.collector = template, via, collector
        self.origins: dict[str, Origin] = {}
        self.used: set[str] = set()
        self.missing: dict[str, Place] = {}

    def fill(self, node: Node) -> Node | None:
        """Return the template filled in, or None where a placeholder has no value or a value no placeholder."""
        filled = self._filled(node)
        for name, place in self.missing.items():
            there = Related(place, "the placeholder")
            message = f"the template needs `{name}`: give it under `with`"
            self.collector.error("schema-violation", message, self.via, there)
        for name, entry in self.given.items():
            if name not in self.used:
                close = self.collector.nearest(name, [*self.missing, *self.used])
                ending = f": did you mean `{close}`?" if close else ""
                message = f"the template has no placeholder `{name}`{ending}"
                self.collector.error("schema-violation", message, entry.key.spot.place)
        return None if self.missing or len(self.used) < len(self.given) else filled

    def _filled(self, node: Node) -> Node:
        spot = self._spot(node.spot)
        match node:
            case Text():
                return self._text(node, spot)
            case Table(entries=entries, braces=braces):
                filled = {
                    name: Entry(Text(self._spot(entry.key.spot), entry.key.value), self._filled(entry.value))
                    for name, entry in entries.items()
                }
                return Table(spot, filled, braces)
            case Items(nodes=nodes):
                return Items(spot, tuple(self._filled(item) for item in nodes))
            case Number(text=written):
                return Number(spot, written)
            case Truth(value=value):
                return Truth(spot, value)
            case Nothing():
                return Nothing(spot)
        return node

    def _text(self, node: Text, spot: Spot) -> Node:
        whole = _PLACEHOLDER.fullmatch(node.value)
        if whole is not None and whole[1] in self.given:
            # the value itself, at its own place: a number stays a number
            self.used.add(whole[1])
            return self.given[whole[1]].value
        if _PLACEHOLDER.search(node.value) is None:
            return Text(spot, node.value, node.inset)
        return Text(spot, _PLACEHOLDER.sub(lambda found: self._inside(found[0], found[1], node), node.value), None)

    def _inside(self, written: str, name: str, node: Text) -> str:
        entry = self.given.get(name)
        if entry is None:
            self.missing.setdefault(name, node.spot.place)
            return written
        self.used.add(name)
        value = entry.value
        return str(value.value).lower() if isinstance(value, Truth) else text(value) or ""

    def _spot(self, spot: Spot) -> Spot:
        path = spot.origin.path
        origin = self.origins.setdefault(path, Origin(path, self.via, self.template))
        return Spot(origin, spot.line, spot.column)
