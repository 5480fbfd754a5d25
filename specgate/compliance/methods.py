"""Verification methods: which are due at the stage of this review, and how they conclude."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from specgate.compliance.assessment import MethodAssessment, RecordAssessment
from specgate.compliance.compare import worst
from specgate.project.types import Method, ProjectInfo, Requirement
from specgate.terms.verdicts import Verdict


def due(method: Method, info: ProjectInfo) -> bool:
    """Whether a method must have concluded at the project's stage; one without a stage is due now."""
    if method.stage is None or info.stage is None or method.stage == info.stage:
        return True
    if method.stage not in info.stages or info.stage not in info.stages:
        return True
    return info.stages.index(method.stage) < info.stages.index(info.stage)


def conclude(
    requirement: Requirement, info: ProjectInfo, analysed: Verdict, records: Sequence[RecordAssessment]
) -> tuple[MethodAssessment, ...]:
    """Return the outcome of every method.

    analysed: what the criteria, the budget or the requirements below give. A method other than analysis concludes by
    its records, the worst of those on this revision of the design; a record that is there before it is due counts.
    """
    found: list[MethodAssessment] = []
    for method in requirement.verification:
        kind = [one for one in records if one.evidence.kind == method.method]
        outcome = _outcome(requirement, method, analysed, kind, now=due(method, info))
        found.append(MethodAssessment(method, outcome, tuple(one.evidence.id for one in kind)))
    return tuple(found)


def _outcome(
    requirement: Requirement, method: Method, analysed: Verdict, records: Sequence[RecordAssessment], *, now: bool
) -> Verdict | Literal["due_later", "no_record"]:
    current = [one.verdict for one in records if not one.stale]
    shown = worst(current) if current else Verdict.OPEN if records else None
    if method.method == "analysis" and (analysable(requirement) or _nothing(requirement, records)):
        shown = worst([analysed, *current]) if now else None
    if now:
        return "no_record" if shown is None else shown
    return "due_later" if shown is None or shown is Verdict.OPEN else shown


def _nothing(requirement: Requirement, records: Sequence[RecordAssessment]) -> bool:
    return requirement.decided_by == "criteria" and not records


def analysable(requirement: Requirement) -> bool:
    """Whether there is something of the requirement itself to analyse; else an analysis is a record like a test."""
    if requirement.decided_by == "evidence":
        return False
    return bool(requirement.criteria) or requirement.budget is not None or requirement.decided_by == "derived"
