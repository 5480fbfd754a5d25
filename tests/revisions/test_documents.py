"""Documents and the tool: what a changed issue touches, and what is otherwise without a cause."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from specgate.review.types import Review, ToolReview
from specgate.revisions.compare import differences

TOOL = ToolReview("specgate", "0")
PATH = "example_projects/pilot_fermenter/rev_a"
Example = Callable[[str], Review]


def with_issue(review: Review, document: str, issue: int) -> Review:
    documents = {**review.specification.documents, document: {"title": "Test report", "issue": issue}}
    return replace(review, specification=replace(review.specification, documents=documents))


def test_another_issue_touches_all_that_rests_on_it_and_nothing_else(example: Example) -> None:
    old, new = (with_issue(example(PATH), "PFV-TR-012", issue) for issue in (1, 2))
    found = differences(old, new, TOOL)
    named = {name for name, one in old.specification.parameters.items() if "PFV-TR-012" in (one.source or "")}
    resting = {name for name, one in old.requirements.items() if named & set(one.rests_on)}
    touched = {one.id for one in found.requirements}
    assert resting
    assert resting <= touched
    assert all(one.touched == ("PFV-TR-012",) and not one.changed for one in found.requirements)
    assert touched < old.requirements.keys()
    assert found.outcome == "not_worse"


def test_what_comes_from_a_document_passes_it_on_to_all_below(example: Example) -> None:
    review = example(PATH)
    need = next(name for name, one in review.requirements.items() if one.derived)
    source = replace(review.requirements[need], external={"document": "X-1", "place": "4"})
    made = replace(review, requirements={**review.requirements, need: source})
    found = differences(with_issue(made, "X-1", 1), with_issue(made, "X-1", 2), TOOL)
    touched = {one.id for one in found.requirements}
    assert {need, *review.requirements[need].derived} <= touched


def test_another_tool_is_said_and_explains_nothing(example: Example) -> None:
    old = example(PATH)
    name = next(name for name, one in old.requirements.items() if one.verdict == "compliant" and one.criteria)
    one = old.requirements[name]
    value = one.criteria[0].result.value
    assert value is not None
    moved = replace(one.criteria[0], result=replace(one.criteria[0].result, value=1.5 * float(value)))
    new = replace(
        old,
        tool=ToolReview("specgate", "99"),
        requirements={**old.requirements, name: replace(one, criteria=(moved, *one.criteria[1:]))},
    )
    found = differences(old, new, TOOL)
    assert [(c.kind, c.what) for c in found.changes] == [("tool", "version")]
    assert [(r.id, r.unexplained, r.because) for r in found.requirements] == [(name, True, ())]
