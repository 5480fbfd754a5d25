"""Who is derived from whom: the trace graph of a specification, as facts."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Literal

from specgate.project.types import Link, Project
from specgate.terms.records import record


@record
class Dangling:
    """A link of a requirement to something that the specification does not hold."""

    requirement: str
    kind: Literal["derived_from", "allocated_to"]
    link: Link


@record
class Graph:
    """Links between requirements, known ids only, in the order of the files.

    parents, children: by id, an entry for every requirement.
    cycles: groups of requirements that are derived from one another (or one from itself).
    order: every id once, children before the requirements that they are derived from, shares of a budget before it;
    the members of a cycle stand together.
    """

    parents: Mapping[str, tuple[str, ...]]
    children: Mapping[str, tuple[str, ...]]
    dangling: tuple[Dangling, ...]
    cycles: tuple[tuple[str, ...], ...]
    order: tuple[str, ...]

    def cyclic(self, requirement: str) -> tuple[str, ...]:
        """Return the cycle that a requirement is in, or nothing."""
        return next((cycle for cycle in self.cycles if requirement in cycle), ())


def trace(project: Project) -> Graph:
    """Build the graph of a project."""
    requirements = project.requirements
    parents = {
        name: tuple(dict.fromkeys(link.id for link in one.derived_from if link.id in requirements))
        for name, one in requirements.items()
    }
    children: dict[str, list[str]] = {name: [] for name in requirements}
    for name, above in parents.items():
        for parent in above:
            children[parent].append(name)
    below = {name: tuple(names) for name, names in children.items()}
    groups = _groups(below, parents)
    return Graph(
        parents=parents,
        children=below,
        dangling=tuple(_dangling(project)),
        cycles=tuple(group for group in groups if len(group) > 1 or group[0] in below[group[0]]),
        order=tuple(name for group in _by_shares(project, below, parents, groups) for name in group),
    )


def _by_shares(
    project: Project,
    children: Mapping[str, tuple[str, ...]],
    parents: Mapping[str, tuple[str, ...]],
    groups: list[tuple[str, ...]],
) -> list[tuple[str, ...]]:
    """Return the groups in an order in which the shares of a budget come before it as well."""
    more: dict[str, list[str]] = {}
    for name, one in project.requirements.items():
        shares = one.budget.shares if one.budget is not None else ()
        more[name] = [share.id for share in shares if share.id in children and share.id not in children[name]]
    if not any(more.values()):
        return groups
    above: dict[str, tuple[str, ...]] = dict(parents)
    for name, shared in more.items():
        for share in shared:
            above[share] = (*above[share], name)
    return _groups({name: (*below, *more[name]) for name, below in children.items()}, above)


def _dangling(project: Project) -> Iterator[Dangling]:
    for name, requirement in project.requirements.items():
        for link in requirement.derived_from:
            if link.id not in project.requirements:
                yield Dangling(name, "derived_from", link)
        for link in requirement.allocated_to:
            if link.id not in project.loops and link.id not in project.subsystems:
                yield Dangling(name, "allocated_to", link)


def _groups(children: Mapping[str, tuple[str, ...]], parents: Mapping[str, tuple[str, ...]]) -> list[tuple[str, ...]]:
    """Return the strongly connected components, those below first (Kosaraju's two passes: Sharir 1981)."""
    place = {name: number for number, name in enumerate(children)}
    seen: set[str] = set()
    finished = [name for root in children for name in _visit(root, children, seen)]
    seen = set()
    groups = [_visit(root, parents, seen) for root in reversed(finished)]
    return [tuple(sorted(group, key=place.__getitem__)) for group in reversed(groups) if group]


def _visit(root: str, edges: Mapping[str, tuple[str, ...]], seen: set[str]) -> list[str]:
    """Return what is reached from `root` and not yet seen, each after all that it leads to.

    Without recursion: chains of links may be longer than the interpreter's stack.
    """
    if root in seen:
        return []
    seen.add(root)
    finished: list[str] = []
    work = [(root, iter(edges[root]))]
    while work:
        name, rest = work[-1]
        following = next((one for one in rest if one not in seen), None)
        if following is None:
            work.pop()
            finished.append(name)
        else:
            seen.add(following)
            work.append((following, iter(edges[following])))
    return finished
