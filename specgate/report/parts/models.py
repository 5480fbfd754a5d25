"""What the models of the blocks take for granted: each assumption under a requirement, the broken ones first."""

from __future__ import annotations

from specgate.report import anchors
from specgate.report.words import CONDITIONS, Status
from specgate.review.types import ModelAssumptionReview, RequirementReview, Review
from specgate.terms.records import record

ROWS_AT_MOST = 120
"""Rows of the printed table; the attached result has all."""

_KINDS = {
    "valid_to": "Valid to a frequency",
    "pedigree": "Kind of knowledge",
    "stands_for": "Stands for",
    "dead_time": "Dead time as a fraction",
    "hidden_slow_mode": "Hidden slow mode",
    "near_cancellation": "Near cancellation",
    "quasi_integrator": "Integrator that is none",
}


@record
class ModelRow:
    """One assumption on one response, break or loop. requirements: ids and places of those that rest on it."""

    what: str
    subsystem: str
    on: str
    found: str
    state: Status
    requirements: tuple[tuple[str, str], ...]


def of_models(requirement: RequirementReview) -> tuple[ModelAssumptionReview, ...]:
    """Return what the models under a requirement take for granted."""
    return tuple(one for one in requirement.assumptions if isinstance(one, ModelAssumptionReview))


def rows(review: Review) -> tuple[ModelRow, ...]:
    """Return every assumption once, with the requirements that rest on it; those that hold last."""
    resting: dict[tuple[str, str, str, str], tuple[ModelAssumptionReview, list[str]]] = {}
    for name, requirement in review.requirements.items():
        for one in of_models(requirement):
            key = one.kind, one.on, one.subsystem or "", one.words
            resting.setdefault(key, (one, []))[1].append(name)
    found = [_row(one, names) for one, names in resting.values()]
    return tuple(sorted(found, key=lambda row: row.state.weight))


def _row(one: ModelAssumptionReview, names: list[str]) -> ModelRow:
    return ModelRow(
        what=_KINDS[one.kind],
        subsystem=one.subsystem or "",
        on=one.on,
        found=one.words,
        state=CONDITIONS[one.holds],
        requirements=tuple((name, anchors.row(name)) for name in names),
    )


def undecided(requirement: RequirementReview) -> str:
    """Say what of the models leaves a requirement inconclusive; nothing where all is told."""
    return "; ".join(one.words for one in of_models(requirement) if one.standing == "inconclusive")
