"""Records and waivers of a requirement, with what they show and excuse."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from specgate.review.types.fields import omitted
from specgate.review.types.values import Amount, Location
from specgate.terms.records import record


@record
class RecordFileReview:
    """The file of a record. intact: whether it has the digest that it is to have; None where that cannot be told."""

    path: str
    digest: str | None
    intact: bool | None


@record
class DisagreementReview:
    """A result that is further from the computed value than its uncertainty and the stated agreement let it be."""

    result: Amount
    computed: Amount
    allowed: Amount
    """Greatest distance of the two."""


@record
class EvidenceReview:
    """A record and what it shows of the requirement: a verdict by the rule of decision, from its worst result."""

    id: str
    kind: str
    title: str | None
    date: str | None
    design_revision: str | None
    stale: bool
    """Whether it is on another revision of the design, and shows nothing of this one."""
    verdict: str
    outcome: str | None
    results: tuple[Amount, ...] = ()
    expanded_uncertainty: Amount | None = None
    worst: Amount | None = None
    reserve: Amount | None = None
    """From the worst result to the limit, without guard band, positive inside."""
    measure: str | None = None
    on: str | None = None
    reason: str | None = None
    disagreement: DisagreementReview | None = omitted()
    file: RecordFileReview | None = omitted()
    source: str | None = omitted()
    location: Location | None = omitted()


@record
class WaiverReview:
    """An accepted departure. excuses: it is in force, needed, and enough."""

    id: str
    kind: str
    reason: str
    scope: str | None
    accepts: Mapping[str, Any]
    approved_by: str
    approved_on: str
    expires: str | None
    """A day, or `revision C`."""
    lapsed: str | None
    """Why it is not in force."""
    needed: bool
    excuses: bool
    short: str | None
    """What is outside of what it accepts."""
    location: Location | None = omitted()
