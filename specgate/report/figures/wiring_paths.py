"""Which line of a loop runs straight through its picture, and what hangs on it as branches."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from specgate.report.figures.wiring_graph import Graph, Line
from specgate.terms.records import record

STEPS = 4000
"""Paths that are tried in search of the longest."""


@record
class Branch:
    """Nodes in the order of their flow, off a node that is drawn already (`start`) or from outside, to another one
    (`end`) or to nowhere. Without nodes it is one line."""

    nodes: tuple[int, ...]
    start: Line | None
    end: Line | None


def parts(graph: Graph) -> list[list[int]]:
    """Return the nodes that hang together, group by group."""
    near: dict[int, set[int]] = {k: set() for k in range(len(graph.nodes))}
    for line in graph.lines:
        near[line.source].add(line.target)
        near[line.target].add(line.source)
    seen: set[int] = set()
    groups = []
    for first in near:
        if first in seen:
            continue
        waiting, group = [first], []
        seen.add(first)
        while waiting:
            here = waiting.pop()
            group.append(here)
            fresh = sorted(near[here] - seen)
            seen.update(fresh)
            waiting += fresh
        groups.append(sorted(group))
    return [group for group in groups if len(group) > 1]


def spine(graph: Graph, group: list[int], channels: Iterable[tuple[str, str]]) -> list[Line]:
    """Return the lines that run straight through: the longest way of the first response, to any response's end.

    Without a response inside the group: the longest way from its first input.
    """
    inside = set(group)
    ends = [(graph.signals[a], graph.signals[b]) for a, b in channels if a in graph.signals and b in graph.signals]
    ends = [(a, b) for a, b in ends if a in inside and b in inside and a != b]
    first = ends[0][0] if ends else next((k for k in group if graph.nodes[k].kind == "input"), group[0])
    targets = {b for a, b in ends if a == first} or inside
    best: list[Line] = []
    for way in _ways(graph, first):
        if way and way[-1].target in targets and len(way) > len(best):
            best = way
    return best


def _ways(graph: Graph, first: int) -> Iterator[list[Line]]:
    """Yield ways without a repeated node, at most STEPS of them."""
    leaving: dict[int, list[Line]] = {}
    for line in graph.lines:
        leaving.setdefault(line.source, []).append(line)
    waiting: list[tuple[list[Line], frozenset[int]]] = [([], frozenset({first}))]
    for _ in range(STEPS):
        if not waiting:
            return
        way, visited = waiting.pop()
        yield way
        here = way[-1].target if way else first
        for line in reversed(leaving.get(here, [])):
            if line.target not in visited:
                waiting.append(([*way, line], visited | {line.target}))


def branches(graph: Graph, group: list[int], through: list[Line]) -> list[Branch]:
    """Return everything beside the spine as branches, each after those that it hangs on."""
    lines = [line for line in graph.lines if line.target in set(group) and line not in through]
    placed = {through[0].source, *(line.target for line in through)} if through else {group[0]}
    found: list[Branch] = []
    while lines:
        branch = _into(lines, placed) or _out_of(lines, placed) or Branch((), lines[0], lines[0])
        found.append(branch)
        placed.update(branch.nodes)
        taken = {id(line) for line in _own(lines, branch)}
        lines = [line for line in lines if id(line) not in taken]
    return found


def _own(lines: list[Line], branch: Branch) -> Iterator[Line]:
    ends = [line for line in (branch.start, branch.end) if line is not None]
    pairs = list(zip(branch.nodes, branch.nodes[1:], strict=False))
    for pair in pairs:
        yield next(line for line in lines if (line.source, line.target) == pair)
    yield from ends


def _into(lines: list[Line], placed: set[int]) -> Branch | None:
    """Return a chain that ends in a placed node, followed back to where it starts."""
    end = next((line for line in lines if line.target in placed and line.source not in placed), None)
    if end is None:
        return None
    nodes = [end.source]
    while True:
        before = [line for line in lines if line.target == nodes[0] and line.source not in nodes]
        start = next((line for line in before if line.source in placed), None)
        if start is not None or not before:
            return Branch(tuple(nodes), start, end)
        nodes.insert(0, before[0].source)


def _out_of(lines: list[Line], placed: set[int]) -> Branch | None:
    """Return a chain that leaves a placed node and comes back to none."""
    start = next((line for line in lines if line.source in placed and line.target not in placed), None)
    if start is None:
        return None
    nodes = [start.target]
    while True:
        after = [line for line in lines if line.source == nodes[-1] and line.target not in (*nodes, *placed)]
        if not after:
            return Branch(tuple(nodes), start, None)
        nodes.append(after[0].target)
