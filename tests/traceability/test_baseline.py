"""Baselines: which links are stale since, and what counts as a change of a requirement."""

from __future__ import annotations

from dataclasses import replace

import pytest

from specgate.intake.load import Problems, load_source
from specgate.project.parameters import values
from specgate.project.types import Project
from specgate.terms.sources import HeldSource
from specgate.traceability.baseline import frozen, stale

TEXT = """\
specgate: 1
project: {id: P-1, title: Fan speed, revision: A}
parameters:
  quickest: {value: 0.5 s, source: survey}
subsystems:
  fan: {input: {unit: V}, output: {unit: m/s}, model: {numerator: [2 m/s/V], denominator: [150 ms, 1]}}
loops:
  air:
    inputs: {drive: {unit: V}}
    signals: {flow: fan(drive)}
    responses:
      start: {from: drive, to: flow, input: step, size: 1 V}
documents:
  D-1: {title: Duct, issue: 1, date: 2026-01-02}
requirements:
  N-1:
    text: The duct shall be ventilated.
    external: {document: D-1, place: 4.2}
  R-1:
    title: Settling
    text: The flow shall settle within 5 % in no more than 0.5 s.
    derived_from: [N-1]
    criterion: {response: air.start, measure: settling_time, band: 5 %, at_most: 0.5 s}
  R-2:
    text: The fan shall be quick.
    derived_from: [R-1, N-1]
"""
LIMIT = "band: 5 %, at_most: 0.5 s"


def project(*changes: tuple[str, str]) -> Project:
    text = TEXT
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    loaded = load_source(HeldSource({"specgate.yaml": text.encode()}))
    assert not isinstance(loaded, Problems), [one.message for one in loaded.findings]
    return loaded


def since(*changes: tuple[str, str], before: Project | None = None) -> list[tuple[str, str]]:
    old, new = before or project(), project(*changes)
    return [(one.child, one.parent) for one in stale(new, values(new), frozen(old, values(old)))]


def test_nothing_is_stale_where_nothing_was_changed() -> None:
    assert since() == []


@pytest.mark.parametrize(
    "change",
    [
        ("settle within 5 % in no more", "settle within 5 %  in\n      no more"),
        ("title: Settling", "title: Settling of the flow"),
        (LIMIT, "at_most: 500 ms, band: 5 %"),
        (LIMIT, "band: 5 %, at_most: quickest"),
        (LIMIT, "band: 5 %, at_most: 0.50 s"),
        (
            "derived_from: [N-1]\n    criterion",
            "derived_from: [N-1]\n    owner: Air\n    rationale: Heat.\n    criterion",
        ),
        ("150 ms", "160 ms"),
    ],
)
def test_what_leaves_a_requirement_as_it_was(change: tuple[str, str]) -> None:
    assert since(change) == []


@pytest.mark.parametrize(
    "change",
    [
        ("The flow shall settle", "The air flow shall settle"),
        (LIMIT, "band: 5 %, at_most: 0.4 s"),
        (LIMIT, "band: 2 %, at_most: 0.5 s"),
        (LIMIT, "band: 5 %, at_least: 0.5 s"),
        ("measure: settling_time, band: 5 %", "measure: delay_time"),
    ],
)
def test_what_changes_a_requirement_makes_the_links_to_it_stale(change: tuple[str, str]) -> None:
    assert since(change) == [("R-2", "R-1")]


def test_a_limit_that_reads_a_parameter_changes_with_it() -> None:
    reads = project((LIMIT, "band: 5 %, at_most: quickest"))
    assert since((LIMIT, "band: 5 %, at_most: quickest"), ("value: 0.5 s", "value: 0.4 s"), before=reads) == [
        ("R-2", "R-1")
    ]


@pytest.mark.parametrize("change", [("issue: 1", "issue: 2"), ("date: 2026-01-02", "date: 2026-03-04"), ("4.2", "4.3")])
def test_another_issue_of_a_document_is_a_change_of_what_comes_from_it(change: tuple[str, str]) -> None:
    assert since(change) == [("R-1", "N-1"), ("R-2", "N-1")]


def test_a_child_that_was_changed_too_follows() -> None:
    assert since(("be ventilated", "be well ventilated"), ("be quick", "be very quick")) == [("R-1", "N-1")]


def test_links_that_came_since_and_parents_that_went_are_not_stale() -> None:
    without = project(("[R-1, N-1]", "[R-1]"))
    assert since(("be ventilated", "be aired"), before=without) == [("R-1", "N-1")]
    assert since(("[R-1, N-1]", "[R-1, X-9]")) == []


CHANGED = ("be ventilated", "be aired")
AFFIRMED = ("[N-1]", "[{id: N-1, reaffirmed: {by: Systems, on: 2026-11-20}}]")


def test_a_link_is_stale_until_it_is_affirmed_and_again_after_the_next_change() -> None:
    assert since(CHANGED, AFFIRMED) == [("R-2", "N-1")]
    affirmed = project(AFFIRMED)
    assert since(CHANGED, AFFIRMED, before=affirmed) == [("R-1", "N-1"), ("R-2", "N-1")]
    again = ("[N-1]", "[{id: N-1, reaffirmed: {by: Systems, on: 2026-12-01}}]")
    assert since(CHANGED, again, before=affirmed) == [("R-2", "N-1")]


def test_a_new_baseline_does_not_forget_what_is_stale() -> None:
    old, new = project(), project(CHANGED, AFFIRMED)
    first = frozen(old, values(old))
    second = frozen(new, values(new), first)
    assert second["R-2"]["N-1"] == first["R-2"]["N-1"]
    assert second["R-1"]["N-1"] != first["R-1"]["N-1"]
    assert [(one.child, one.parent) for one in stale(new, values(new), second)] == [("R-2", "N-1")]
    assert stale(new, values(new), frozen(new, values(new))) == ()


def test_the_order_of_criteria_and_of_links_says_nothing() -> None:
    new = project()
    turned = replace(
        new,
        requirements={
            name: replace(one, derived_from=one.derived_from[::-1], criteria=one.criteria[::-1])
            for name, one in reversed(new.requirements.items())
        },
    )
    assert stale(turned, values(turned), frozen(new, values(new))) == ()
