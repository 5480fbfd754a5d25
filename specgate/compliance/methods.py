"""Verification methods: which are due at the stage of this review, and how they conclude."""

from __future__ import annotations

from specgate.compliance.assessment import MethodAssessment
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
    requirement: Requirement, info: ProjectInfo, analysed: Verdict, recorded: bool
) -> tuple[MethodAssessment, ...]:
    """Return the outcome of every method.

    analysed: what the analysis gives. recorded: whether evidence names the requirement; this version keeps it and
    does not judge it, so that a method other than analysis is open with it and has no record without.
    """
    outcomes: list[MethodAssessment] = []
    for method in requirement.verification:
        if not due(method, info):
            outcomes.append(MethodAssessment(method, "due_later"))
        elif method.method == "analysis":
            outcomes.append(MethodAssessment(method, analysed))
        else:
            outcomes.append(MethodAssessment(method, Verdict.OPEN if recorded else "no_record"))
    return tuple(outcomes)
