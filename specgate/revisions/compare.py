"""Two Reviews to their Differences, the worst first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace

from specgate.review.types import FindingReview, RequirementReview, Review, ToolReview
from specgate.revisions import causes as found_in
from specgate.revisions import declared, pairs
from specgate.revisions.causes import Moved
from specgate.revisions.findings import RESTATING, new_and_gone
from specgate.revisions.judging import BETTER, CHANGED, MIXED, WORSE, gravity, worsenings
from specgate.revisions.requirements import difference, explained
from specgate.revisions.responses import responses
from specgate.revisions.types import Change, Differences, RequirementDifference, Side, Worsening

FORMAT = 1
"""Version of the format of differences."""


def differences(old: Review, new: Review, tool: ToolReview, remarks: tuple[str, ...] = ()) -> Differences:
    """Compare two revisions. tool: what compares them; remarks: what of them could not be read."""
    paired = pairs.requirements(old.requirements, new.requirements)
    changes = declared.changes(old, new, paired)
    found = _requirements(old, new, paired, changes)
    come, gone = new_and_gone(old.findings, new.findings)
    sides = _side(old), _side(new)
    worse = got_worse(*sides, found, come)
    return Differences(
        format=FORMAT,
        tool=tool,
        old=sides[0],
        new=sides[1],
        outcome="worse" if worse else "not_worse",
        worse=worse,
        requirements=found,
        changes=changes,
        new_findings=come,
        gone_findings=gone,
        responses=tuple(responses(old, new)),
        remarks=remarks,
    )


def _side(review: Review) -> Side:
    return Side(review.project, review.tool, review.format, review.gate)


def got_worse(
    old: Side, new: Side, found: tuple[RequirementDifference, ...], come: tuple[FindingReview, ...]
) -> tuple[Worsening, ...]:
    """Return what got worse, the gravest first: the gate, requirements, and errors that do not only restate those."""
    gate = old.gate.outcome, new.gate.outcome
    worse = [Worsening("gate", "gate", *gate)] if gate == ("pass", "hold") else []
    worse += (one for each in found for one in worsenings(each))
    said = frozenset(one.name for one in worse)
    return tuple(sorted((*worse, *_errors(come, said)), key=gravity))


def _errors(come: tuple[FindingReview, ...], said: frozenset[str]) -> Iterator[Worsening]:
    for one in come:
        if one.level == "error" and not (one.rule in RESTATING and one.requirement in said):
            yield Worsening("finding", one.rule, None, None, message=one.message, location=one.location)


# --- requirements ---------------------------------------------------------------------------------------------


def _requirements(
    old: Review, new: Review, paired: tuple[pairs.Paired, ...], changes: tuple[Change, ...]
) -> tuple[RequirementDifference, ...]:
    """Return what stands otherwise, with its causes, and what rests on a document that was changed."""
    causes = found_in.causes(changes)
    touched = found_in.touched(causes, old, new) if causes.documents else {}
    every = {pair: difference(pair, old, new) for pair in paired}
    moved = Moved(_named(every, ("presence", "verdict")), _named(every, ("presence", "verdict", "value")))
    found: list[RequirementDifference] = []
    for pair, each in every.items():
        documents = tuple(sorted({*touched.get(pair.old or "", ()), *touched.get(pair.new or "", ())}))
        if each.changed or documents:
            with_documents = replace(each, touched=documents)
            found.append(explained(with_documents, pair, _sides(pair, old, new), causes, moved))
    return tuple(sorted(found, key=rank))


def _named(every: Mapping[pairs.Paired, RequirementDifference], parts: tuple[str, ...]) -> frozenset[str]:
    """Return both ids of the requirements in which one of these parts is another."""
    moved = (pair for pair, each in every.items() if set(parts) & set(each.changed))
    return frozenset(name for pair in moved for name in (pair.old, pair.new) if name is not None)


def _sides(pair: pairs.Paired, old: Review, new: Review) -> tuple[RequirementReview, ...]:
    names = ((old, pair.old), (new, pair.new))
    return tuple(review.requirements[name] for review, name in names if name is not None)


_JUDGED = (WORSE, MIXED, CHANGED, BETTER)
_PARTS = ("presence", "verdict", "standing", "methods", "criteria", "value", "reserve")


def rank(one: RequirementDifference) -> tuple[int, int, int, str]:
    """Return what requirements are sorted by: worse first, then by how grave the state is, then by the weightiest."""
    state = one.new or one.old
    grave = {"non_compliant": 0, "open": 1}.get(state.verdict if state else "", 2)
    part = min((_PARTS.index(each) for each in one.changed), default=len(_PARTS))
    return _JUDGED.index(one.judged), grave, part, one.id
