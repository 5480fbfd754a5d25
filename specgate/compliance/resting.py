"""Which criteria rest on which responses, so that each response is spoken of once for each requirement."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from specgate.compliance.assessment import Assessment, CriterionAssessment


def by_response(assessment: Assessment) -> Iterator[CriterionAssessment]:
    """Give the first criterion of a requirement on each response that rests on ranges."""
    seen: set[str] = set()
    for one in assessment.criteria:
        if one.assumptions and one.assumptions[0].on not in seen:
            seen.add(one.assumptions[0].on)
            yield one


def asked(assessments: Mapping[str, Assessment]) -> frozenset[tuple[str, str]]:
    """Return the responses that some requirement is on, as loop and name."""
    subjects = (one.criterion.subject for each in assessments.values() for one in each.criteria)
    return frozenset((one.loop, one.name) for one in subjects if one.kind == "response" and one.name is not None)
