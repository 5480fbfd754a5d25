"""Single mutations of the examples: each causes the findings and differences that its table says, and no others.

Beside the tables stand laws that hold whatever was mutated: with one version of the tool nothing is otherwise without a
cause; nothing that does not rest on what was changed is otherwise; and a change of words alone moves no result.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pytest

from specgate.revisions.types import Differences

from .workshop import Mutation, Workshop, mutations, told
from .write import TABLES

HERE = Path(__file__).resolve().parent
ROWS = [(table, row) for table in TABLES for row in mutations(HERE / f"{table}.yaml")]
LEAST = 60


@cache
def workshop(table: str) -> Workshop:
    return Workshop(TABLES[table])


@pytest.mark.parametrize("table", TABLES)
def test_there_are_enough(table: str) -> None:
    rows = mutations(HERE / f"{table}.yaml")
    assert len({(row.file, row.after, row.old, row.new) for row in rows}) >= LEAST


@pytest.mark.parametrize(("table", "row"), ROWS, ids=lambda value: value.name if isinstance(value, Mutation) else value)
def test_what_comes_of_it_and_no_more(table: str, row: Mutation) -> None:
    found = workshop(table).mutated(row)
    assert tuple(told(found)) == row.expect
    if isinstance(found, Differences):
        _laws(found)


def _laws(found: Differences) -> None:
    """Assert what holds for every mutation."""
    assert not [one.id for one in found.requirements if one.unexplained]
    changed = {f"{one.kind} {one.name}" for one in found.changes if one.bears or one.how == "renamed"}
    moved = {f"requirement {one.id}" for one in found.requirements}
    for one in found.requirements:
        own = {name for name in one.because if name.startswith("its ") or name == "what is derived from it"}
        assert set(one.because) <= changed | moved | own | {"project stage", "project date", "project revision"}
    if not changed:
        assert not found.requirements
    assert (found.outcome == "worse") == bool(found.worse)
    assert not found.worse or found.requirements or found.new_findings
