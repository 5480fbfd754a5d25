"""Differences seen from the other side, by the definitions and not by comparing again."""

from __future__ import annotations

from dataclasses import replace

from specgate.revisions.compare import got_worse, rank
from specgate.revisions.declared import rank as rank_of_change
from specgate.revisions.judging import judged, moves
from specgate.revisions.requirements import rank as rank_of_criterion
from specgate.revisions.types import Change, CriterionDifference, Differences, RequirementDifference

_OPPOSITE = {"added": "removed", "removed": "added", "tightened": "loosened", "loosened": "tightened"}


def mirrored(found: Differences) -> Differences:
    """Swap old and new throughout; what is judged or sorted is judged and sorted again."""
    renamed = {one.new: one.old for one in found.changes if one.how == "renamed"}
    requirements = tuple(sorted((_requirement(one) for one in found.requirements), key=rank))
    come, gone = found.gone_findings, found.new_findings
    worse = got_worse(found.new, found.old, requirements, come)
    return replace(
        found,
        old=found.new,
        new=found.old,
        outcome="worse" if worse else "not_worse",
        worse=worse,
        requirements=requirements,
        changes=tuple(sorted((_change(one, renamed) for one in found.changes), key=rank_of_change)),
        new_findings=come,
        gone_findings=gone,
        responses=tuple(replace(one, old=one.new, new=one.old) for one in found.responses),
    )


def _requirement(one: RequirementDifference) -> RequirementDifference:
    there = one.old or one.new
    assert there is not None
    turned = replace(
        one,
        id=there.id,
        old=one.new,
        new=one.old,
        criteria=tuple(sorted(map(_criterion, one.criteria), key=rank_of_criterion)),
    )
    return replace(turned, judged=judged(moves(turned)))


def _criterion(one: CriterionDifference) -> CriterionDifference:
    return replace(one, old=one.new, new=one.old)


def _change(one: Change, renamed: dict[str | None, str | None]) -> Change:
    name = renamed.get(one.name) if one.kind in ("requirement", "criterion") else None
    return replace(
        one,
        name=name or one.name,
        how=_OPPOSITE.get(one.how, one.how),
        old=one.new,
        new=one.old,
        old_location=one.new_location,
        new_location=one.old_location,
    )
