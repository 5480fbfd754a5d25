"""What the builders share: where findings go, the units, and which names the project declares."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

from specgate.intake.collect import Collector
from specgate.intake.nodes import Items, Node, Number, Table, Text
from specgate.project.types import MaskDefinition
from specgate.terms.expressions import Expression, ExpressionError, parse
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.units import Unit, UnitError, UnitTable

_WORD = re.compile(r"[A-Za-z_][A-Za-z0-9_]*", re.ASCII)


@record
class Ports:
    """Names of the inputs and outputs of a subsystem."""

    inputs: tuple[str, ...]
    outputs: tuple[str, ...]


@record
class LoopNames:
    """Names that a loop declares."""

    inputs: tuple[str, ...]
    signals: tuple[str, ...]
    responses: tuple[str, ...]
    breaks: tuple[str, ...]


@dataclass
class Context:
    """Names by section, whether or not what stands behind them could be read.

    own: parameter names of each subsystem. laid: the masks that could be read. digests: of the files of records, by
    path.
    """

    collector: Collector
    units: UnitTable
    shared: frozenset[str] = frozenset()
    own: Mapping[str, frozenset[str]] = field(default_factory=dict)
    ports: Mapping[str, Ports] = field(default_factory=dict)
    loops: Mapping[str, LoopNames] = field(default_factory=dict)
    masks: frozenset[str] = frozenset()
    laid: Mapping[str, MaskDefinition] = field(default_factory=dict)
    cases: frozenset[str] = frozenset()
    evidence: frozenset[str] = frozenset()
    stages: tuple[str, ...] = ()
    digests: Mapping[str, str] = field(default_factory=dict)
    lost_units: frozenset[str] = frozenset()
    """Units of the project's own that could not be read: a text with one in it is not reported again."""
    names_known: bool = True
    """Whether all names are known that the project declares: no file and no section of it is unreadable."""
    holes: int = 0
    """Parts that were left out or that could not be read, each of which has been reported."""
    units_read: set[str] = field(default_factory=set)
    parsed: dict[str, Expression | ExpressionError] = field(default_factory=dict)
    """Every text that was read as an expression, with what came of it."""

    def parse(self, written: str) -> Expression:
        """Read an expression. Raises ExpressionError."""
        found = self.parsed.get(written)
        if found is None:
            try:
                found = parse(written, self.units)
            except ExpressionError as error:
                found = error
            self.parsed[written] = found
        if isinstance(found, ExpressionError):
            raise found
        return found

    def unit(self, node: Node | None) -> Unit | None:
        """Read the unit at a node (`m/s`, or 1 for none)."""
        if not isinstance(node, Text | Number) or node.spot in self.collector.unreadable:
            return None
        text = node.value if isinstance(node, Text) else node.text
        try:
            unit = self.units.parse(text)
        except UnitError as error:
            if not self.loses(text):
                self.collector.error("unit-unknown", error.message, node.spot.place)
            return None
        if text != "1":
            self.units_read.add(text)
        return unit

    def loses(self, written: str) -> bool:
        """Whether a text cannot be read because of a unit that was reported where it is defined."""
        return not self.lost_units.isdisjoint(_WORD.findall(written))

    def unknown(self, what: str, name: str, known: Iterable[str], place: Place, owner: str | None = None) -> None:
        """Report a name that nothing in the project (or nothing of its `owner`) has.

        Where a part of the project is unreadable that may declare it, nothing is said.
        """
        self.holes += 1
        if not self.names_known:
            return
        names = tuple(known)
        ending_in = "." + name
        own = (candidate for candidate in names if candidate.endswith(ending_in) or candidate == name)
        close = next(own, None) or self.collector.nearest(name, names)
        if close is not None:
            ending = f": did you mean `{close}`?"
        elif 0 < len(names) <= 12:
            ending = f": there is {', '.join(names)}"
        else:
            ending = "" if names else ": none is defined"
        start = "there is no" if owner is None else f"`{owner}` has no"
        self.collector.error("name-unknown", f"{start} {what} `{name[:80]}`{ending}", place)


# --- what stands at a node, or a default: shapes are the schema's business and have been reported ---------------------


def table(node: Node | None) -> Table | None:
    """Return the table at a node."""
    return node if isinstance(node, Table) else None


def entries(node: Node | None) -> Iterable[tuple[Text, Node]]:
    """Iterate over the keys and values of a table."""
    return node.items() if isinstance(node, Table) else ()


def keys(node: Node | None) -> tuple[str, ...]:
    """Return the keys of a table."""
    return tuple(node.entries) if isinstance(node, Table) else ()


def items(node: Node | None) -> tuple[Node, ...]:
    """Return the nodes of a list; a single text counts as a list of one."""
    if isinstance(node, Items):
        return node.nodes
    return (node,) if isinstance(node, Text) else ()


def text(node: Node | None) -> str | None:
    """Return a text, or a number as it was written."""
    if isinstance(node, Text):
        return node.value.strip()
    return node.text if isinstance(node, Number) else None


def texts(node: Node | None) -> tuple[str, ...]:
    """Return the texts of a list."""
    return tuple(found for item in items(node) if (found := text(item)) is not None)
