"""From the bytes of one YAML file to a tree of nodes, in one guarded pass over the parser's events.

YAML 1.2 core reading: only `true`, `false` and `null` are words, numbers stay exact, everything else is text. What
could make a small file grow (aliases), run (tags) or exhaust the reader (depth, number of nodes, digits) is refused on
the event that shows it, before anything is built from it.
"""

from __future__ import annotations

import gc
import re
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from typing import Any

import yaml

from specgate.intake.collect import Collector
from specgate.intake.nodes import Broken, Entry, Items, Node, Nothing, Number, Origin, Spot, Table, Text, Truth
from specgate.intake.traps import cut_number, syntax_hint
from specgate.terms.decimals import DecimalError, exact_decimal
from specgate.terms.findings import Related
from specgate.terms.places import Place

DEEPEST = 60
"""Levels of nesting. The format needs 9."""
LONGEST_KEY = 200
"""Characters of a key."""
MOST_NODES = 600_000
"""Nodes of all files of a project together: more than 25,000 requirements have; their tree takes 110 MB at most."""

_NUMBER = re.compile(r"[-+]?(?:\.[0-9]+|[0-9]+(?:\.[0-9]*)?)(?:[eE][-+]?[0-9]+)?", re.ASCII)
_SURELY_SHORT = 4
"""Characters of a number below which neither its digits nor its power of ten can be out of reach."""
_BEGINS_NUMBER = frozenset("-+.0123456789")
_WORDS = {"true": True, "True": True, "TRUE": True, "false": False, "False": False, "FALSE": False}
_NULLS = frozenset(("", "~", "null", "Null", "NULL"))
_UNPRINTABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x84\x86-\x9f\ufffe\uffff]")

_ENDS = (yaml.MappingEndEvent, yaml.SequenceEndEvent)
_Loader: Any = getattr(yaml, "CSafeLoader", yaml.SafeLoader)


class _Enough(Exception):
    """So much is wrong with the file that reading on would help nobody."""


class _Refused(Exception):
    """The file cannot be read on: why, and where (line and column from 0)."""

    def __init__(self, message: str, line: int, column: int) -> None:
        super().__init__(message)
        self.message, self.line, self.column = message, line, column


@dataclass
class Allowance:
    """How many nodes may still be read in this project."""

    nodes: int = MOST_NODES


def read(data: bytes, origin: Origin, allowance: Allowance, collector: Collector) -> Node:
    """Read one file. What is wrong goes to the collector; a file that cannot be read gives a Broken node.

    Reading ends where the collector is full.
    """
    try:
        text = _decoded(data)
        with _garbage_left_alone():
            root = _Tree(text, origin, allowance, collector).root()
    except _Refused as refused:
        place = Place(origin.path, refused.line + 1, refused.column + 1, origin.via)
        collector.error("yaml-invalid", refused.message, place)
        return Broken(Spot(origin, refused.line + 1, refused.column + 1))
    except _Enough:
        return Broken(Spot(origin, 1, 1))
    return root


@contextmanager
def _garbage_left_alone() -> Iterator[None]:
    """Run the body without garbage collection: a tree has no cycles, and searching it for some doubles the time."""
    running = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if running:
            gc.enable()


def _decoded(data: bytes) -> str:
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        raise _Refused("the file is in UTF-16: save it as UTF-8", 0, 0)
    data = data.removeprefix(b"\xef\xbb\xbf")
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError as error:
        before = data[: error.start].decode("utf-8")
        raise _Refused(f"byte 0x{data[error.start]:02x} is not UTF-8: save the file as UTF-8", *_end(before)) from None
    match = _UNPRINTABLE.search(text)
    if match is not None:
        code = ord(match[0])
        name = "a NUL byte" if code == 0 else f"the control character U+{code:04X}"
        raise _Refused(f"{name} has no place in a YAML file", *_end(text[: match.start()]))
    return text


def _end(text: str) -> tuple[int, int]:
    """Return line and column (from 0) just after `text`."""
    return text.count("\n"), len(text) - text.rfind("\n") - 1


@dataclass
class _Frame:
    """A table or list that is still open; `key` is the key that waits for its value."""

    spot: Spot
    table: bool
    braces: bool
    entries: dict[str, Entry] = field(default_factory=dict)
    nodes: list[Node] = field(default_factory=list)
    key: Text | None = None
    skip: bool = False
    end: int = -1
    """Where in the text the last scalar of a list in brackets ended."""

    def node(self) -> Node:
        return Table(self.spot, self.entries, self.braces) if self.table else Items(self.spot, tuple(self.nodes))


class _Tree:
    """The pass over the events of one file."""

    def __init__(self, text: str, origin: Origin, allowance: Allowance, collector: Collector) -> None:
        self.text, self.origin, self.allowance, self.collector = text, origin, allowance, collector
        self.open: list[_Frame] = []
        self.done: Node | None = None

    def root(self) -> Node:
        """Return the only document of the file. Raises _Refused and _Enough."""
        for event in self._events():
            kind = type(event)
            if kind is yaml.ScalarEvent:
                self._counted(event)
                self._scalar(event)
            elif kind in _ENDS:
                self._value(self.open.pop().node())
            elif isinstance(event, yaml.NodeEvent):
                self._counted(event)
                self._collection(event)
            elif isinstance(event, yaml.DocumentStartEvent) and self.done is not None:
                raise _refusal("a second document begins here: a file holds one, remove the `---`", event)
        if self.done is None:
            raise _Refused("the file is empty", 0, 0)
        return self.done

    def _events(self) -> Iterator[Any]:
        parser = _Loader(self.text)
        try:
            while (event := parser.get_event()) is not None:
                yield event
        except yaml.MarkedYAMLError as error:
            raise self._syntax(error) from None
        except yaml.YAMLError:
            raise _Refused("this cannot be read as YAML", 0, 0) from None
        finally:
            parser.dispose()

    def _syntax(self, error: yaml.MarkedYAMLError) -> _Refused:
        mark, context = error.problem_mark, error.context_mark
        problem = str(error.problem)
        lines = self.text.split("\n")
        line, column = (mark.line, mark.column) if mark else (0, 0)
        opened = (context.line, context.column) if context else None
        hint = syntax_hint(lines, line, column, opened, problem)
        if opened and "end of stream" in problem:
            line, column = opened
        return _Refused(f"this is not YAML: {hint}", line, column)

    def _counted(self, event: Any) -> None:
        """Take a node off the allowance. Raises _Refused where there is none left, and for aliases and tags."""
        self.allowance.nodes -= 1
        if self.allowance.nodes < 0:
            raise _refusal(f"the project has more than {MOST_NODES} values: split it", event)
        if type(event) is yaml.AliasEvent:
            raise _refusal(f"the alias `*{event.anchor}` is refused: write the value out, or use a parameter", event)
        if event.tag is not None:
            raise _refusal(f"the tag `{event.tag[:60]}` is refused: tags have no meaning in this format", event)

    def _collection(self, event: Any) -> None:
        if len(self.open) >= DEEPEST:
            raise _refusal(f"nested more than {DEEPEST} levels deep", event)
        if self.open and self.open[-1].table and self.open[-1].key is None:
            raise _refusal("a key is a name, not a list or a table: texts that begin with [ or { need quotes", event)
        table = isinstance(event, yaml.MappingStartEvent)
        self.open.append(_Frame(self._spot(event), table, bool(event.flow_style)))

    def _scalar(self, event: Any) -> None:
        spot = self._spot(event)
        if self.open and self.open[-1].table and self.open[-1].key is None:
            self._key(self.open[-1], Text(spot, event.value), event)
        elif event.implicit[0]:
            node = self._resolved(event, spot)
            if self.open and self.open[-1].braces and not self.open[-1].table:
                node = self._beside(self.open[-1], node, event)
            self._value(node)
        else:
            self._value(Text(spot, event.value, _inset(event, 1)))

    def _beside(self, frame: _Frame, node: Node, event: Any) -> Node:
        """Return an entry of a list; where a decimal comma has cut it in two (`0,3 s`), one that is reported."""
        before = frame.nodes[-1] if frame.nodes else None
        together = isinstance(before, Number) and frame.end + 1 == event.start_mark.index
        hint = cut_number(before.text, str(event.value)) if together and isinstance(before, Number) else None
        frame.end = event.end_mark.index
        if hint is None or before is None:
            return node
        self.collector.error("schema-violation", hint, before.spot.place)
        frame.nodes.pop()
        return Broken(before.spot)

    def _key(self, frame: _Frame, key: Text, event: Any) -> None:
        if key.value == "<<" and event.implicit[0]:
            raise _refusal("merge keys (<<) are refused: write the keys out", event)
        if not key.value or len(key.value) > LONGEST_KEY:
            raise _refusal(f"a key has from 1 to {LONGEST_KEY} characters", event)
        frame.key = key
        first = frame.entries.get(key.value)
        frame.skip = first is not None
        if first is not None:
            self._twice(first.key, key)

    def _twice(self, first: Text, second: Text) -> None:
        there = Related(first.spot.place, "first written here")
        message = f"`{first.value}` is written twice, first in line {first.spot.line}: remove or rename one"
        self.collector.error("id-duplicate", message, second.spot.place, there)
        if self.collector.full:
            raise _Enough

    def _value(self, node: Node) -> None:
        """Put a finished node where it belongs."""
        if not self.open:
            self.done = node
            return
        frame = self.open[-1]
        if not frame.table:
            frame.nodes.append(node)
        elif frame.key is not None:
            if not frame.skip:
                frame.entries[frame.key.value] = Entry(frame.key, node)
            frame.key = None

    def _resolved(self, event: Any, spot: Spot) -> Node:
        value: str = event.value
        if value[:1] in _BEGINS_NUMBER and _NUMBER.fullmatch(value):
            return self._number(value, spot)
        if value in _WORDS:
            return Truth(spot, _WORDS[value])
        if value in _NULLS:
            return Nothing(spot)
        return Text(spot, value, _inset(event, 0))

    def _number(self, value: str, spot: Spot) -> Node:
        if len(value) > _SURELY_SHORT:
            try:
                exact_decimal(value)
            except DecimalError as error:
                self.collector.error("yaml-invalid", str(error), spot.place)
                if self.collector.full:
                    raise _Enough from None
                return Broken(spot)
        return Number(spot, value)

    def _spot(self, event: Any) -> Spot:
        mark = event.start_mark
        return Spot(self.origin, mark.line + 1, mark.column + 1)


def _inset(event: Any, quotes: int) -> int | None:
    """Return how far right of its mark a text begins, or None if its characters are not columns of the file."""
    start, end = event.start_mark, event.end_mark
    same = start.line == end.line and end.column - start.column == len(event.value) + 2 * quotes
    return quotes if same else None


def _refusal(message: str, event: Any) -> _Refused:
    return _Refused(message, event.start_mark.line, event.start_mark.column)
