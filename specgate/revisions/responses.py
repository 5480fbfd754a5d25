"""Responses that run otherwise than before, each with both curves."""

from __future__ import annotations

from collections.abc import Iterator

from specgate.review.types import ResponseReview, Review
from specgate.revisions.types import ResponseDifference, ResponseState


def responses(old: Review, new: Review) -> Iterator[ResponseDifference]:
    """Give every response that both sides have and whose transfer function, input or signal is another."""
    for loop in sorted(old.loops.keys() & new.loops.keys()):
        before, after = old.loops[loop].responses, new.loops[loop].responses
        for name in sorted(before.keys() & after.keys()):
            was, now = before[name], after[name]
            if _runs(was) != _runs(now):
                asked = _asked(old, f"{loop}.{name}") | _asked(new, f"{loop}.{name}")
                yield ResponseDifference(loop, name, _state(was), _state(now), tuple(sorted(asked)))


def _state(one: ResponseReview) -> ResponseState:
    return ResponseState(one.to, one.unit, one.curve)


def _runs(one: ResponseReview) -> tuple[object, ...]:
    ratio = one.numerator, one.denominator, one.numerator_terms, one.denominator_terms
    return one.from_, one.to, dict(one.input), one.unit, ratio, one.curve


def _asked(review: Review, on: str) -> set[str]:
    return {name for name, one in review.requirements.items() if any(each.on == on for each in one.criteria)}
