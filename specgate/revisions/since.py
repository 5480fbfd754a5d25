"""The gate of a run that counts from a baseline: it holds on what got worse since, and on nothing that was there."""

from __future__ import annotations

from specgate.review.types import GateReview, Review
from specgate.revisions.compare import differences
from specgate.revisions.types import Worsening

_SAID = {"non_compliant": "non-compliant"}


def only_new(review: Review, baseline: Review) -> GateReview:
    """Return the gate of a result by what got worse since the result of a baseline."""
    worse = differences(baseline, review, review.tool).worse
    reasons = tuple(_sentence(one) for one in worse if one.kind != "gate")
    about = f"{baseline.project.id} revision {baseline.project.revision}"
    return GateReview("hold" if reasons else "pass", reasons, since=about)


def _sentence(one: Worsening) -> str:
    name = one.name if one.on is None else f"{one.name}, {one.on}"
    if one.kind == "finding":
        where = f" ({one.location.path}:{one.location.line}:{one.location.column})" if one.location else ""
        return f"{one.message or one.name}{where}"
    if one.kind == "removed":
        return f"{name} was {_word(one.old)} and is no longer there"
    return f"{name} was {_word(one.old)} and is {_word(one.new)} now"


def _word(key: str | None) -> str:
    return _SAID.get(key or "", (key or "absent").replace("_", " "))
