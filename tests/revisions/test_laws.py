"""Laws of differences: nothing differs from itself, and from the other side everything is the other way round."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.review.types import Amount, LimitReview, Review, ToolReview
from specgate.revisions.amounts import order
from specgate.revisions.compare import differences
from specgate.revisions.limits import compared

from .edits import Edit, amounts, edited, edits, limits
from .mirror import mirrored

TOOL = ToolReview("specgate", "0")
PROJECTS = ["example_projects/pilot_fermenter/rev_a", "tests/examples/spec_format"]
_OPPOSITE = {"tightened": "loosened", "loosened": "tightened"}
Example = Callable[[str], Review]


def _empty(one: Review) -> None:
    found = differences(one, one, TOOL)
    assert found.outcome == "not_worse"
    parts = (found.worse, found.requirements, found.changes, found.responses, found.new_findings, found.gone_findings)
    assert not any(parts)


@pytest.mark.parametrize("path", PROJECTS)
@given(some=st.lists(edits, max_size=4))
@settings(max_examples=25, deadline=None)
def test_nothing_differs_from_itself(example: Example, path: str, some: list[Edit]) -> None:
    _empty(edited(example(path), some))


@pytest.mark.parametrize("path", PROJECTS)
@given(some=st.lists(edits, max_size=4), others=st.lists(edits, max_size=4))
@settings(max_examples=60, deadline=None)
def test_from_the_other_side_all_is_the_other_way_round(
    example: Example, path: str, some: list[Edit], others: list[Edit]
) -> None:
    old, new = edited(example(path), some), edited(example(path), others)
    there, back = differences(old, new, TOOL), differences(new, old, TOOL)
    assert mirrored(there) == back
    assert mirrored(back) == there


@pytest.mark.parametrize("name", ["pilot_fermenter", "survey_airship"])
def test_the_revisions_of_the_examples_mirror(example: Example, name: str) -> None:
    old, new = (example(f"example_projects/{name}/{revision}") for revision in ("rev_a", "rev_b"))
    assert mirrored(differences(old, new, TOOL)) == differences(new, old, TOOL)


@given(limits, limits)
def test_a_limit_is_tightened_exactly_where_it_is_loosened_backwards(old: LimitReview, new: LimitReview) -> None:
    there = compared(old, new)
    assert compared(new, old) == _OPPOSITE.get(there, there)
    assert compared(old, old) == "same"


@given(amounts, amounts)
def test_amounts_are_in_one_order(left: Amount, right: Amount) -> None:
    found, back = order(left, right), order(right, left)
    assert (found is None) == (back is None)
    if found is not None and back is not None:
        assert found == -back


@given(st.lists(edits, max_size=3))
@settings(max_examples=25, deadline=None)
def test_a_verdict_that_falls_is_worse_and_nothing_else_in_it_is_needed(example: Example, some: list[Edit]) -> None:
    old = edited(example(PROJECTS[0]), some)
    name = next((name for name, one in old.requirements.items() if one.verdict == "compliant"), None)
    if name is None:
        return
    fallen = replace(old.requirements[name], verdict="open")
    found = differences(old, replace(old, requirements={**old.requirements, name: fallen}), TOOL)
    assert [(one.kind, one.name, one.old, one.new) for one in found.worse] == [("verdict", name, "compliant", "open")]
    assert [one.id for one in found.requirements if one.unexplained] == [name]
