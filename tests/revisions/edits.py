"""Random edits of a Review: what an engineer changes in the files, and what a run then finds otherwise."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from hypothesis import strategies as st

from specgate.review.types import Amount, FindingReview, LimitReview, Location, RequirementReview, Review

HERE = Location("specgate.yaml", 1, 1)
Edit = Callable[[Review], Review]
VERDICTS = st.sampled_from(["compliant", "non_compliant", "open", "not_applicable"])
STANDINGS = st.sampled_from(["sound", "inconclusive", "out_of_range", None])
WORDS = st.sampled_from(["a", "b c", "The loop shall settle.", "The  loop shall settle."])
UNITS = ["s", "ms", "min", "1", "%", "dB", "rpm", "rad/s", "m", "count"]
amounts = st.builds(
    lambda exact, unit: Amount(float(exact), unit, str(exact)),
    st.fractions(-9, 9, max_denominator=8),
    st.sampled_from(UNITS),
)
limits = st.one_of(
    st.builds(lambda one: LimitReview(at_most=one), amounts),
    st.builds(lambda one: LimitReview(at_least=one), amounts),
    st.builds(lambda one, other: LimitReview(between=(one, other)), amounts, amounts),
    st.builds(lambda one, other: LimitReview(within=one, of=other), amounts, amounts),
    st.builds(lambda one: LimitReview(equals=one), st.booleans() | st.integers(0, 3)),
)


def _requirement(change: Callable[[RequirementReview, Any], RequirementReview], values: Any) -> st.SearchStrategy[Edit]:
    def edit(number: int, value: Any) -> Edit:
        def apply(review: Review) -> Review:
            names = sorted(review.requirements)
            if not names:
                return review
            name = names[number % len(names)]
            changed = change(review.requirements[name], value)
            return replace(review, requirements={**review.requirements, name: changed})

        return apply

    return st.builds(edit, st.integers(0, 50), values)


def _criterion(field: str, values: Any) -> st.SearchStrategy[Edit]:
    def change(one: RequirementReview, value: Any) -> RequirementReview:
        if not one.criteria:
            return one
        return replace(one, criteria=(replace(one.criteria[0], **{field: value}), *one.criteria[1:]))

    return _requirement(change, values)


def _renamed(review: Review, number: int, name: str | None) -> Review:
    names = sorted(review.requirements)
    if not names:
        return review
    old = names[number % len(names)]
    kept = {key if key != old else name: one for key, one in review.requirements.items() if key != old or name}
    return replace(review, requirements={key: one for key, one in kept.items() if key is not None})


def _finding(review: Review, rule: str, level: str, message: str) -> Review:
    return replace(review, findings=(*review.findings, FindingReview(rule, level, message, HERE)))


def _document(review: Review, issue: int) -> Review:
    documents = {**review.specification.documents, "DOC-1": {"issue": issue, "title": "Interface"}}
    return replace(review, specification=replace(review.specification, documents=documents))


def _parameter(review: Review, number: int, value: float) -> Review:
    parameters = dict(review.specification.parameters)
    if not parameters:
        return review
    name = sorted(parameters)[number % len(parameters)]
    parameters[name] = replace(parameters[name], value=value, exact=None, as_written=f"{value} s")
    return replace(review, specification=replace(review.specification, parameters=parameters))


edits: st.SearchStrategy[Edit] = st.one_of(
    _requirement(lambda one, value: replace(one, verdict=value), VERDICTS),
    _requirement(lambda one, value: replace(one, standing=value), STANDINGS),
    _requirement(lambda one, value: replace(one, text=value), WORDS),
    _requirement(lambda one, value: replace(one, decided_by=value), st.sampled_from(["criteria", "derived"])),
    _requirement(lambda one, value: replace(one, criteria=one.criteria[:value]), st.integers(0, 1)),
    _requirement(lambda one, value: replace(one, criteria=one.criteria * value), st.integers(1, 2)),
    _criterion("verdict", VERDICTS),
    _criterion("limit", limits),
    _criterion("on", st.sampled_from(["loop.follow", "loop.main"])),
    st.builds(
        lambda n, name: lambda r: _renamed(r, n, name), st.integers(0, 50), st.sampled_from([None, "NEW", "Z-1"])
    ),
    st.builds(
        lambda rule, level, words: lambda r: _finding(r, rule, level, words),
        st.sampled_from(["requirement-orphan", "requirement-not-met"]),
        st.sampled_from(["error", "warning"]),
        st.sampled_from(["X is 1.2 s", "X is 1.3 s", "Y-1 is there"]),
    ),
    st.builds(lambda issue: lambda r: _document(r, issue), st.integers(1, 3)),
    st.builds(lambda n, v: lambda r: _parameter(r, n, v), st.integers(0, 9), st.floats(0.5, 2)),
    st.builds(
        lambda outcome: lambda r: replace(r, gate=replace(r.gate, outcome=outcome)), st.sampled_from(["pass", "hold"])
    ),
)


def edited(review: Review, some: list[Edit]) -> Review:
    """Return a Review after some edits."""
    for edit in some:
        review = edit(review)
    return review
