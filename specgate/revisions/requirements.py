"""One requirement on both sides: what stands otherwise than before, and because of which changes."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from specgate.review.types import Amount, CriterionReview, RequirementReview, Result, Review
from specgate.revisions import causes as found_in
from specgate.revisions.amounts import order
from specgate.revisions.causes import Causes, Moved
from specgate.revisions.judging import CHANGED, judged, moved, moves
from specgate.revisions.pairs import Paired, criteria
from specgate.revisions.said import limit, said
from specgate.revisions.types import CriterionDifference, CriterionState, RequirementDifference, RequirementState


def difference(pair: Paired, old: Review, new: Review) -> RequirementDifference:
    """Return how a requirement stands otherwise than before, without causes; nothing `changed` where it does not."""
    was = None if pair.old is None else old.requirements[pair.old]
    now = None if pair.new is None else new.requirements[pair.new]
    met = () if was is None or now is None else tuple(sorted(_criteria(was, now), key=rank))
    found = RequirementDifference(
        id=pair.id,
        old=None if was is None else _state(pair.old or "", was),
        new=None if now is None else _state(pair.new or "", now),
        criteria=met,
        judged=CHANGED,
        changed=(),
        because=(),
        unexplained=False,
        touched=(),
    )
    changed = tuple(_changed(found))
    return replace(found, judged=judged(moves(found)), changed=changed)


def explained(
    found: RequirementDifference,
    pair: Paired,
    sides: tuple[RequirementReview, ...],
    causes: Causes,
    others: Moved,
) -> RequirementDifference:
    """Return a difference with the changes that it rests on; `others` tells what else is another."""
    if len(sides) == 1:
        return found
    below = set(found_in.from_below(pair, sides, others))
    values = set(found_in.of_values(causes, pair, sides)) | below
    verdicts = values | set(found_in.of_verdicts(causes, pair, sides))
    wide = {*found_in.project_wide(causes), *(f"document {name}" for name in found.touched)}
    of_value = "value" in found.changed
    rests = {part for part in found.changed if part != "reserve"}
    unexplained = (of_value and not values) or bool(rests and not verdicts | wide)
    because = tuple(sorted(verdicts or wide)) if found.changed else ()
    return replace(found, because=because, unexplained=unexplained)


def _changed(found: RequirementDifference) -> Iterator[str]:
    """Name what is another: presence, verdict, standing, methods, and what is another in some criterion."""
    old, new = found.old, found.new
    if old is None or new is None:
        yield "presence"
        return
    if old.verdict != new.verdict:
        yield "verdict"
    if old.standing != new.standing:
        yield "standing"
    outcomes = ((old.methods[key], new.methods[key]) for key in old.methods.keys() & new.methods.keys())
    if any(before != after and (before, after) != (old.verdict, new.verdict) for before, after in outcomes):
        yield "methods"
    parts = {part for one in found.criteria for part in one.changed}
    if "presence" in parts:
        yield "criteria"
    for part in ("verdict", "standing", "value", "reserve"):
        if part in parts and getattr(old, part, None) == getattr(new, part, None):
            yield part


def _state(name: str, one: RequirementReview) -> RequirementState:
    methods: dict[str, str] = {}
    for each in one.methods:
        key = f"{each.method} at {each.stage}" if each.stage else each.method
        methods.setdefault(key, each.outcome)
    return RequirementState(name, one.title, one.owner, one.verdict, one.standing, methods, one.location)


# --- criteria -------------------------------------------------------------------------------------------------


def _criteria(old: RequirementReview, new: RequirementReview) -> Iterator[CriterionDifference]:
    for was, now in criteria(old.criteria, new.criteria):
        there = now or was
        assert there is not None
        changed = ("presence",) if was is None or now is None else tuple(_moved(was, now))
        if changed:
            states = _criterion(was), _criterion(now)
            yield CriterionDifference(there.measure, *states, changed)


def rank(one: CriterionDifference) -> tuple[int, str, str, bool, str]:
    """Return what criteria are sorted by: what fell first."""
    old, new = one.old, one.new
    there = new or old
    fell = 0 if old is None or new is None else moved(old.verdict, new.verdict)
    about = "" if there is None else f"{there.on} {said(there.arguments)} {limit(there.limit)}"
    return fell, one.measure, about, old is None, "" if old is None else limit(old.limit)


def _moved(old: CriterionReview, new: CriterionReview) -> Iterator[str]:
    if old.verdict != new.verdict:
        yield "verdict"
    if old.standing != new.standing:
        yield "standing"
    if not same(old.result, new.result):
        yield "value"
    if not _same_reserve(old, new):
        yield "reserve"


def _criterion(one: CriterionReview | None) -> CriterionState | None:
    if one is None:
        return None
    return CriterionState(one.on, one.arguments, one.limit, one.verdict, one.standing, one.result, one.reserve)


def same(old: Result, new: Result) -> bool:
    """Tell whether two results are the same: as printed in one unit; in two units, if their proved bounds meet."""
    if (old.infinite, old.value is None) != (new.infinite, new.value is None):
        return False
    if old.value is None:
        return old.infinite is True or old.reason == new.reason
    if isinstance(old.value, bool) or isinstance(new.value, bool) or old.unit == new.unit:
        return old.value == new.value
    below = order(_end(old, old.lower), _end(new, new.upper))
    above = order(_end(old, old.upper), _end(new, new.lower))
    return below is not None and above is not None and below <= 0 <= above


def _end(result: Result, end: float | None) -> Amount:
    """Return an end of what is proved; of an exact result, the result."""
    if end is not None:
        return Amount(end, result.unit or "1")
    return Amount(result.value, result.unit or "1", result.exact)


def _same_reserve(old: CriterionReview, new: CriterionReview) -> bool:
    before, after = old.reserve, new.reserve
    if before is None or after is None:
        return before is after
    if before.unit != after.unit:
        return same(old.result, new.result)
    return (before.value, before.infinite) == (after.value, after.infinite)
