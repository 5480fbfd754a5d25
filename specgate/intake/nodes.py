"""The tree that a YAML file is read into: exact scalars, tables and lists, each knowing where it was written."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any, NamedTuple

from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Origin:
    """The file that a node comes from, and what brought that file (or that text) in; the template it is a text of."""

    path: str
    via: Place | None = None
    template: str | None = None


class Spot(NamedTuple):
    """Where a node begins: `line` and `column` counted from 1. The place is only made when it is asked for."""

    origin: Origin
    line: int
    column: int

    @property
    def place(self) -> Place:
        """Return the place for a finding."""
        return self.moved(0)

    def moved(self, columns: int) -> Place:
        """Return the place `columns` further right on the same line."""
        origin = self.origin
        return Place(origin.path, self.line, self.column + columns, origin.via, origin.template)


@dataclass(frozen=True, slots=True, eq=False)
class Text:
    """Text; `inset` is how many columns its first character stands right of its spot (1 after a quote).

    inset is None where offsets in the text are no columns of the file: several lines, escapes, a filled-in template.
    """

    spot: Spot
    value: str
    inset: int | None = 0

    def place_of(self, offset: int) -> Place:
        """Return the place of the character at `offset`, or of the beginning where that is not known."""
        return self.spot.place if self.inset is None else self.spot.moved(self.inset + offset)


@dataclass(frozen=True, slots=True, eq=False)
class Number:
    """A number, kept as it was written; it never passes through a binary float."""

    spot: Spot
    text: str

    @property
    def exact(self) -> int | Decimal:
        """Return the value: an int where it is whole, so that 1e3, 1000.0 and 1000 are the same."""
        value = Decimal(self.text)
        return int(value) if value == value.to_integral_value() else value


@dataclass(frozen=True, slots=True, eq=False)
class Truth:
    """`true` or `false`."""

    spot: Spot
    value: bool


@dataclass(frozen=True, slots=True, eq=False)
class Nothing:
    """`null`, `~`, or nothing at all after a colon."""

    spot: Spot


@dataclass(frozen=True, slots=True, eq=False)
class Broken:
    """Something that could not be read and was reported: whoever meets it says nothing more."""

    spot: Spot


@dataclass(frozen=True, slots=True, eq=False)
class Entry:
    """A key with its value; the key has a place of its own."""

    key: Text
    value: Node


@dataclass(frozen=True, slots=True, eq=False)
class Table:
    """Keys and values in the order of the file; `braces` where it was written as `{…}`."""

    spot: Spot
    entries: Mapping[str, Entry]
    braces: bool = False

    def get(self, key: str) -> Node | None:
        """Return the value under a key, or None."""
        entry = self.entries.get(key)
        return None if entry is None else entry.value

    def items(self) -> Iterator[tuple[Text, Node]]:
        """Iterate over keys and values."""
        return ((entry.key, entry.value) for entry in self.entries.values())


@dataclass(frozen=True, slots=True, eq=False)
class Items:
    """A list."""

    spot: Spot
    nodes: tuple[Node, ...]


Node = Text | Number | Truth | Nothing | Broken | Table | Items


def plain(node: Node) -> Any:
    """Return the tree as dict, list, str, int, Decimal, bool and None: what the schema is checked against."""
    match node:
        case Text(value=value) | Truth(value=value):
            return value
        case Number():
            return node.exact
        case Table(entries=entries):
            return {key: plain(entry.value) for key, entry in entries.items()}
        case Items(nodes=nodes):
            return [plain(item) for item in nodes]
        case _:
            return None


def as_kept(node: Node) -> object:
    """Return the tree as plain values to be kept: numbers that are not whole stay the text that was written."""
    match node:
        case Number():
            value = node.exact
            return value if isinstance(value, int) else node.text
        case Table(entries=entries):
            return {key: as_kept(entry.value) for key, entry in entries.items()}
        case Items(nodes=nodes):
            return [as_kept(item) for item in nodes]
        case _:
            return plain(node)


def shown(node: Node | None, longest: int = 40) -> str:
    """Return a few words on what stands at a node, for `found …`."""
    match node:
        case None | Nothing():
            return "nothing"
        case Text(value=value):
            words = value if len(value) <= longest else value[: longest - 1] + "…"
            return f"the text `{' '.join(words.split())}`" if words else "an empty text"
        case Number(text=text):
            return f"the number {text}"
        case Truth(value=value):
            return "true" if value else "false"
        case Items(nodes=nodes):
            entries = "1 entry" if len(nodes) == 1 else f"{len(nodes)} entries"
            return f"a list of {entries}" if nodes else "an empty list"
        case Table(entries=entries):
            return "a table with keys" if entries else "an empty table"
        case _:
            return "something unreadable"
