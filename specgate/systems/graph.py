"""Directed graphs: strongly connected components and what is reached from where. Order never depends on hashes."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Iterator, Mapping, Sequence
from typing import TypeVar

Node = TypeVar("Node", bound=Hashable)


def strong_components(arcs: Mapping[Node, Sequence[Node]]) -> tuple[tuple[Node, ...], ...]:
    """Return the strongly connected components, those upstream first; `arcs` gives each node's successors.

    Within a component the nodes keep the order of `arcs`. (Tarjan 1972, with an explicit stack: a long chain of
    blocks must not meet the recursion limit.)
    """
    position = {node: index for index, node in enumerate(arcs)}
    index: dict[Node, int] = {}
    low: dict[Node, int] = {}
    open_nodes: dict[Node, None] = {}
    found: list[tuple[Node, ...]] = []
    for root in arcs:
        if root in index:
            continue
        index[root] = low[root] = len(index)
        open_nodes[root] = None
        path: list[tuple[Node, Iterator[Node]]] = [(root, iter(arcs[root]))]
        while path:
            node, rest = path[-1]
            successor = next(rest, None)
            if successor is None:
                path.pop()
                if path:
                    low[path[-1][0]] = min(low[path[-1][0]], low[node])
                if low[node] == index[node]:
                    found.append(_closed(node, open_nodes, position))
            elif successor not in index:
                index[successor] = low[successor] = len(index)
                open_nodes[successor] = None
                path.append((successor, iter(arcs[successor])))
            elif successor in open_nodes:
                low[node] = min(low[node], index[successor])
    return tuple(reversed(found))


def _closed(node: Node, open_nodes: dict[Node, None], position: Mapping[Node, int]) -> tuple[Node, ...]:
    members = []
    while True:
        last, _ = open_nodes.popitem()
        members.append(last)
        if last == node:
            return tuple(sorted(members, key=position.__getitem__))


def reached(starts: Iterable[Node], arcs: Mapping[Node, Sequence[Node]]) -> frozenset[Node]:
    """Return the nodes that can be reached from `starts`, these included."""
    seen = dict.fromkeys(starts)
    waiting = list(seen)
    while waiting:
        for successor in arcs[waiting.pop()]:
            if successor not in seen:
                seen[successor] = None
                waiting.append(successor)
    return frozenset(seen)


def reversed_arcs(arcs: Mapping[Node, Sequence[Node]]) -> dict[Node, list[Node]]:
    """Return the graph with every arc turned round."""
    result: dict[Node, list[Node]] = {node: [] for node in arcs}
    for node, successors in arcs.items():
        for successor in successors:
            result[successor].append(node)
    return result


def is_cycle(component: Sequence[Node], arcs: Mapping[Node, Sequence[Node]]) -> bool:
    """Whether a strongly connected component closes a loop: several nodes, or one that feeds itself."""
    return len(component) > 1 or component[0] in arcs[component[0]]
