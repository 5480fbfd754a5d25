"""Which criteria rest on which responses, so that each response is spoken of once for each requirement."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.compliance.assessment import Assessment, CriterionAssessment, worst_standing
from specgate.compliance.model.fact import Kind, ModelAssumption
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Resting:
    """A requirement that rests on an assumption of a model, by one of its criteria."""

    requirement: str
    assessment: Assessment
    criterion: CriterionAssessment
    assumption: ModelAssumption

    @property
    def place(self) -> Place:
        """Where the criterion is written."""
        return self.criterion.criterion.place


def by_response(assessment: Assessment) -> Iterator[CriterionAssessment]:
    """Give the first criterion of a requirement on each response that rests on ranges."""
    seen: set[str] = set()
    for one in assessment.criteria:
        if one.assumptions and one.assumptions[0].on not in seen:
            seen.add(one.assumptions[0].on)
            yield one


def resting(assessments: Mapping[str, Assessment], kind: Kind) -> Iterator[Resting]:
    """Give every requirement with each assumption of a kind that it rests on, once for each subject and subsystem."""
    for name, assessment in assessments.items():
        yield from (Resting(name, assessment, by, one) for by, one in _models(assessment) if one.kind == kind)


def models(assessment: Assessment) -> tuple[ModelAssumption, ...]:
    """Return what the models under a requirement take for granted, once for each subject and subsystem."""
    return tuple(one for _, one in _models(assessment))


def _models(assessment: Assessment) -> Iterator[tuple[CriterionAssessment, ModelAssumption]]:
    """Give each assumption once, from the criterion that leaves it the worst standing."""
    found: dict[tuple[str, str, str | None], list[tuple[CriterionAssessment, ModelAssumption]]] = {}
    for criterion in assessment.criteria:
        for one in criterion.model:
            found.setdefault((one.kind, one.on, one.subsystem), []).append((criterion, one))
    for pairs in found.values():
        worst = worst_standing(one.standing for _, one in pairs)
        yield next(pair for pair in pairs if pair[1].standing is worst)


def asked(assessments: Mapping[str, Assessment]) -> frozenset[tuple[str, str]]:
    """Return the responses that some requirement is on, as loop and name."""
    subjects = (one.criterion.subject for each in assessments.values() for one in each.criteria)
    return frozenset((one.loop, one.name) for one in subjects if one.kind == "response" and one.name is not None)
