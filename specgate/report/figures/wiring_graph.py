"""From the equations of a loop's signals to what is drawn of them: blocks, sums, gains, and the lines between.

The equations were checked when they were read; here they are only taken apart. Whatever does not look as expected
raises NotDrawable, and the report shows the equations alone.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from specgate.terms.records import record

Kind = Literal["input", "block", "sum", "gain"]
_TOKEN = re.compile(r"\s*([A-Za-z_]\w*|[0-9.]+(?:[eE][+-]?[0-9]+)?|\*\*|[-+*/().,=]|\S)")
_NAME = re.compile(r"[A-Za-z_]\w*\Z")
DEEPEST = 40


class NotDrawable(Exception):
    """The wiring cannot be drawn, or not so that it can be read."""


@record
class Line:
    """A line into a node: where it comes from, its sign at a sum, the names of the ports at both ends."""

    source: int
    target: int
    negative: bool = False
    output: str = ""
    input: str = ""


@dataclass
class Node:
    """Something that is drawn, and the signals that are taken from it, each with the port that gives it."""

    kind: Kind
    label: str
    signals: list[tuple[str, str]] = field(default_factory=list)


@record
class Graph:
    """All nodes and lines of a loop; `signals` says which node gives each signal."""

    nodes: tuple[Node, ...]
    lines: tuple[Line, ...]
    signals: Mapping[str, int]


@record
class _Ref:
    """The output of a node, or a signal that is not resolved yet."""

    of: int | str
    output: str = ""


@record
class _Term:
    negative: bool
    gain: str
    ref: _Ref | None
    """None for a constant, which `gain` then holds."""


def graph(inputs: tuple[str, ...], wiring: Mapping[str, str]) -> Graph:
    """Return what is drawn of a loop. Raises NotDrawable."""
    builder = _Builder(frozenset((*inputs, *wiring)))
    given = {name: _Ref(builder.node("input", name)) for name in inputs}
    for name, text in wiring.items():
        given[name] = _Parser(text, builder).read()
    return builder.finish(given)


class _Builder:
    """Collects nodes, each block with the same arguments once."""

    def __init__(self, signals: frozenset[str]) -> None:
        self.signals = signals
        self.nodes: list[Node] = []
        self.pending: list[tuple[_Ref, int, bool, str]] = []
        self.known: dict[tuple[object, ...], int] = {}

    def node(self, kind: Kind, label: str) -> int:
        self.nodes.append(Node(kind, label))
        return len(self.nodes) - 1

    def join(self, kind: Kind, label: str, entries: tuple[tuple[_Ref, bool, str], ...]) -> int:
        """Return the node of this kind with these lines into it, the one that exists if there is one."""
        key = (kind, label, entries)
        if kind != "sum" and key in self.known:
            return self.known[key]
        at = self.known[key] = self.node(kind, label)
        self.pending += [(ref, at, negative, port) for ref, negative, port in entries]
        return at

    def total(self, terms: list[_Term]) -> _Ref:
        """Return the output of a sum; one term alone needs none."""
        refs = []
        for term in terms:
            if term.ref is None:
                raise NotDrawable("a constant in a sum")
            gained = bool(term.gain) or (term.negative and len(terms) == 1)
            label = f"−{term.gain or 1}" if term.negative and len(terms) == 1 else term.gain
            ref = _Ref(self.join("gain", label, ((term.ref, False, ""),))) if gained else term.ref
            refs.append((ref, term.negative and len(terms) > 1, ""))
        return refs[0][0] if len(refs) == 1 else _Ref(self.join("sum", "", tuple(refs)))

    def finish(self, given: Mapping[str, _Ref]) -> Graph:
        """Resolve signals that stand for others, and name what each node gives."""
        resolved = {name: self._resolve(name, given) for name in given}
        for name, ref in resolved.items():
            node = self.nodes[int(ref.of)]
            if node.kind != "input":
                node.signals.append((name, ref.output))
        lines = []
        for ref, target, negative, port in self.pending:
            end = resolved[ref.of] if isinstance(ref.of, str) else ref
            lines.append(Line(int(end.of), target, negative, end.output, port))
        return Graph(tuple(self.nodes), tuple(lines), {name: int(ref.of) for name, ref in resolved.items()})

    def _resolve(self, name: str, given: Mapping[str, _Ref]) -> _Ref:
        ref, seen = given[name], {name}
        while isinstance(ref.of, str):
            if ref.of in seen:
                raise NotDrawable("signals that stand for each other in a circle")
            seen.add(ref.of)
            ref = given[ref.of]
        return ref


class _Parser:
    """Reads one equation: sums of terms, a term one signal or call with constants around it."""

    def __init__(self, text: str, builder: _Builder) -> None:
        self.tokens = _TOKEN.findall(text)
        self.builder = builder
        self.at = 0
        self.depth = 0

    @property
    def now(self) -> str:
        return self.tokens[self.at] if self.at < len(self.tokens) else ""

    def take(self, wanted: str | None = None) -> str:
        token = self.now
        if not token or (wanted is not None and token != wanted):
            raise NotDrawable(f"found {token or 'the end'}")
        self.at += 1
        return token

    def read(self) -> _Ref:
        ref = self.builder.total(self.sum())
        if self.now:
            raise NotDrawable(f"found {self.now}")
        return ref

    def sum(self) -> list[_Term]:
        terms = [self.term(False)]
        while self.now in ("+", "-"):
            terms.append(self.term(self.take() == "-"))
        return terms

    def term(self, negative: bool) -> _Term:
        while self.now in ("+", "-"):
            negative ^= self.take() == "-"
        ref: _Ref | None = None
        gain: list[str] = []
        while True:
            part = self.factor()
            if isinstance(part, _Ref):
                if ref is not None:
                    raise NotDrawable("a product of signals")
                ref = part
                if gain and gain[-1] == "*":
                    gain.pop()
            else:
                gain.append(part)
            if self.now in ("*", "/"):
                if gain or self.now == "/":
                    gain.append(self.take())
                else:
                    self.take()
            elif self.starts_factor():
                # A number before a signal: its unit, or the signal itself, stands behind a blank.
                continue
            else:
                break
        words = " ".join(gain).replace("/ ", "/").replace(" /", "/")
        return _Term(negative, "1" + words if words.startswith("/") else words, ref)

    def starts_factor(self) -> bool:
        return bool(self.now) and (self.now == "(" or _NAME.match(self.now) is not None or self.now[0].isdigit())

    def factor(self) -> _Ref | str:
        token = self.take()
        if token == "(":
            return self.bracket()
        if not _NAME.match(token) or (self.now != "(" and token not in self.builder.signals):
            return token
        return self.call(token) if self.now == "(" else _Ref(token)

    def bracket(self) -> _Ref | str:
        self.depth += 1
        if self.depth > DEEPEST:
            raise NotDrawable("brackets inside one another")
        start = self.at
        terms = self.sum()
        self.take(")")
        self.depth -= 1
        if all(term.ref is None for term in terms):
            return f"({''.join(self.tokens[start : self.at - 1])})"
        return self.builder.total(terms)

    def call(self, block: str) -> _Ref:
        self.take("(")
        self.depth += 1
        if self.depth > DEEPEST:
            raise NotDrawable("blocks inside one another")
        entries = []
        while True:
            port = ""
            if self.at + 1 < len(self.tokens) and self.tokens[self.at + 1] == "=":
                port = self.take()
                self.take("=")
            entries.append((self.builder.total(self.sum()), False, port))
            if self.now != ",":
                break
            self.take(",")
        self.take(")")
        self.depth -= 1
        output = ""
        if self.now == ".":
            self.take(".")
            output = self.take()
        return _Ref(self.builder.join("block", block, tuple(entries)), output)
