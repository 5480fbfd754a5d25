"""The trace graph: children before parents, circles found, links to nothing listed."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import cast

from hypothesis import given
from hypothesis import strategies as st

from specgate.project.types import Link, Project, Requirement
from specgate.terms.places import Place
from specgate.traceability.graph import Graph, trace

HERE = Place("specgate.yaml", 1, 1)


class OnlyRequirements:
    """The parts of a project that the graph looks at."""

    def __init__(self, derived: Mapping[str, Sequence[str]], allocated: Mapping[str, Sequence[str]]) -> None:
        self.loops = {"loop": None}
        self.subsystems = {"block": None}
        self.requirements = {
            name: Requirement(
                name,
                "text",
                HERE,
                derived_from=tuple(Link(parent, HERE) for parent in parents),
                allocated_to=tuple(Link(target, HERE) for target in allocated.get(name, ())),
            )
            for name, parents in derived.items()
        }


def graph(derived: Mapping[str, Sequence[str]], allocated: Mapping[str, Sequence[str]] | None = None) -> Graph:
    return trace(cast(Project, OnlyRequirements(derived, allocated or {})))


def test_parents_and_children() -> None:
    found = graph({"A": [], "B": ["A"], "C": ["A", "B"]})
    assert found.parents == {"A": (), "B": ("A",), "C": ("A", "B")}
    assert found.children == {"A": ("B", "C"), "B": ("C",), "C": ()}
    assert found.order.index("C") < found.order.index("B") < found.order.index("A")
    assert found.cycles == ()


def test_circles_are_found_once_and_in_the_order_of_the_files() -> None:
    found = graph({"A": ["C"], "B": ["A"], "C": ["B"], "D": ["A"], "E": ["E"]})
    assert found.cycles in ((("A", "B", "C"), ("E",)), (("E",), ("A", "B", "C")))
    assert found.cyclic("B") == ("A", "B", "C")
    assert found.cyclic("D") == ()


def test_links_to_nothing() -> None:
    found = graph({"A": ["Z"], "B": ["A"]}, {"A": ["loop", "block", "nowhere"]})
    assert [(one.requirement, one.kind, one.link.id) for one in found.dangling] == [
        ("A", "derived_from", "Z"),
        ("A", "allocated_to", "nowhere"),
    ]
    assert found.parents["A"] == ()


def test_a_chain_longer_than_the_stack() -> None:
    names = [f"R{number}" for number in range(20_000)]
    found = graph({name: [above] for above, name in zip([names[0], *names[:-1]], names, strict=True)})
    assert len(found.order) == len(names)
    assert found.cycles == (("R0",),)


@given(st.lists(st.tuples(st.integers(0, 11), st.integers(0, 11)), max_size=40))
def test_order_and_circles_against_reachability(pairs: list[tuple[int, int]]) -> None:
    derived: dict[str, list[str]] = {str(number): [] for number in range(12)}
    for child, parent in pairs:
        derived[str(child)].append(str(parent))
    found = graph(derived)
    above = {name: _reachable(name, derived) for name in derived}
    assert sorted(found.order) == sorted(derived)
    for child, parents in derived.items():
        for parent in parents:
            if child not in above[parent]:
                assert found.order.index(child) < found.order.index(parent)
    for name in derived:
        group = tuple(other for other in derived if other in above[name] and name in above[other])
        assert found.cyclic(name) == group


def _reachable(name: str, derived: Mapping[str, Sequence[str]]) -> set[str]:
    seen: set[str] = set()
    waiting = list(derived[name])
    while waiting:
        one = waiting.pop()
        if one not in seen:
            seen.add(one)
            waiting.extend(derived[one])
    return seen
