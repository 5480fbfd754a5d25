"""From a folder, a file or another source of files to a Project, or to everything that is wrong with it."""

from __future__ import annotations

from pathlib import Path

from specgate.intake import evidence, merge, shape
from specgate.intake.build import build, is_whole
from specgate.intake.collect import Collector, Problems
from specgate.intake.gather import Gathered, gather
from specgate.intake.nodes import Broken, Entry, Node, Nothing, Table
from specgate.intake.templates import expand
from specgate.project import dimensions
from specgate.project.types import Project
from specgate.terms.sources import FolderSource, Source

__all__ = ["ENTRY", "Problems", "load", "load_source"]

ENTRY = "specgate.yaml"
"""The file that a project begins with."""


def load(path: Path) -> Project | Problems:
    """Read the project at a path: a folder with a specgate.yaml, or one YAML file."""
    if path.is_dir():
        return load_source(FolderSource(path))
    return load_source(FolderSource(path.parent), path.name)


def load_source(source: Source, entry: str = ENTRY) -> Project | Problems:
    """Read the project that begins with the file `entry` of a source.

    Never raises for what stands in the files: all findings are returned, sorted by place.
    """
    collector = Collector()
    gathered = gather(source, entry, collector)
    project = _built(gathered, collector, source)
    if project is None:
        return collector.problems(gathered.inputs)
    return project


def _built(gathered: Gathered, collector: Collector, source: Source) -> Project | None:
    """Build the project as far as its files allow, and report what is wrong."""
    roots = _roots(gathered, collector)
    if not any(isinstance(root, Table) for root in roots) or collector.full:
        return None
    # a section that cannot be read may declare any name: to call the others unknown would mislead
    whole = gathered.complete and merge.readable(roots)
    root = merge.merged(roots, collector)
    if whole:
        shape.check(_outline(root), collector, "whole_project")
    merge.check_namespace(root, collector)
    digests = evidence.digests(root.get("evidence"), source)
    gathered.digests |= digests
    project = build(root, gathered.inputs, collector, digests, names_known=whole)
    if collector.full:
        return None
    for finding in dimensions.check(project):
        collector.add(finding)
    if collector.failed:
        return None
    if project.partial or not is_whole(project, root):
        raise AssertionError("a part of the project was left out without a word")
    return dimensions.settled(project)


def _outline(root: Table) -> Table:
    """Return a tree of which only the sections are named: what is in them was checked file by file."""
    return Table(root.spot, {name: Entry(entry.key, Nothing(entry.value.spot)) for name, entry in root.entries.items()})


def _roots(gathered: Gathered, collector: Collector) -> list[Node]:
    """Return the trees of the files with templates filled in, their shapes checked."""
    trees = [file.root for file in gathered.files]
    known = gathered.complete and not any(isinstance(tree, Broken) for tree in trees)
    tables = [Table(tree.spot, {"templates": tree.entries["templates"]}) for tree in _with_templates(trees)]
    templates = merge.section(merge.merged(tables, Collector()), "templates") if tables else {}
    roots = [expand(tree, templates, collector, all_known=known) for tree in trees]
    for root in roots:
        shape.check(root, collector)
    return roots


def _with_templates(trees: list[Node]) -> list[Table]:
    return [tree for tree in trees if isinstance(tree, Table) and "templates" in tree.entries]
