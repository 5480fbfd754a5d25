"""The result of a whole run: title block, policy, findings, gate."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from specgate.review.types.fields import omitted
from specgate.review.types.loops import LoopReview
from specgate.review.types.requirements import RequirementReview
from specgate.review.types.specification import SpecificationReview
from specgate.review.types.values import Location
from specgate.terms.records import record


@record
class FindingReview:
    """A finding as printed."""

    rule: str
    level: str
    message: str
    location: Location
    requirement: str | None = omitted()
    loop: str | None = omitted()
    response: str | None = omitted()
    subsystem: str | None = omitted()
    related: tuple[Location, ...] = ()


@record
class GateReview:
    """Outcome (`pass`, `hold`, `unusable`) and, one sentence each, what holds it."""

    outcome: str
    reasons: tuple[str, ...]
    since: str | None = omitted()
    """The baseline that the gate counts from, where it holds only on what got worse since."""


@record
class ToolReview:
    """Which program made the result."""

    name: str
    version: str


@record
class InputReview:
    """A file that was read and the digest of its bytes."""

    path: str
    sha256: str


@record
class ProjectReview:
    """Title block."""

    id: str
    title: str
    revision: str
    date: str | None
    stage: str | None
    stages: tuple[str, ...]
    sign_off: tuple[str, ...]


@record
class PolicyReview:
    """What holds the gate, how results are evaluated, thresholds that the project changed."""

    hold_on: tuple[str, ...]
    evaluate: str
    changed_thresholds: tuple[Mapping[str, Any], ...] = ()
    guard: float | None = omitted()
    """Guard band of guarded acceptance, in expanded uncertainties; left out with simple acceptance."""
    model_agreement: str | None = omitted()
    today: str | None = omitted()
    """The day as which waivers are judged, where it is not the date of the title block."""


@record
class DefinitionReview:
    """The text that `explain` prints, of every measure, approximation and rule that was used."""

    kind: str
    title: str
    text: str
    source: str | None = None
    summary: str | None = omitted()
    """Of it what a printed report quotes: what it is, its formula, when it has no value."""


@record
class Review:
    """The whole result of a run on a project that could be built."""

    format: int
    tool: ToolReview
    project: ProjectReview
    inputs: tuple[InputReview, ...]
    policy: PolicyReview
    units: tuple[str, ...]
    specification: SpecificationReview
    loops: Mapping[str, LoopReview]
    requirements: Mapping[str, RequirementReview]
    trace: Mapping[str, tuple[str, ...]]
    definitions: Mapping[str, DefinitionReview]
    findings: tuple[FindingReview, ...]
    gate: GateReview


@record
class Unusable:
    """The result of a run on a project that could not be built."""

    format: int
    tool: ToolReview
    inputs: tuple[InputReview, ...]
    findings: tuple[FindingReview, ...]
    gate: GateReview
