"""The differences of two revisions, in plain values; a mirror of `schemas/differences.schema.json`, key for key.

`old` and `new` are the two sides throughout; None where a side has no such thing.
"""

from __future__ import annotations

from collections.abc import Mapping

from specgate.review.types import (
    Curve,
    FindingReview,
    GateReview,
    LimitReview,
    Location,
    ProjectReview,
    ReserveReview,
    Result,
    ToolReview,
)
from specgate.review.types.fields import omitted
from specgate.terms.records import record


@record
class Side:
    """One of the two revisions: its title block, what made the result, and its gate."""

    project: ProjectReview
    tool: ToolReview
    format: int
    gate: GateReview


@record
class Change:
    """Something that somebody changed in the files, or in the tool that read them.

    kind: requirement, criterion, parameter, subsystem, loop, response, break, document, policy, project, definition
    or tool. name: which one; of a criterion, its requirement. what: the field (`text`, `value`, `wiring` …), of a
    criterion with its measure before it. how: added, removed, renamed, reworded, tightened, loosened, shifted (a limit
    that is tighter on one side and looser on the other) or changed. bears: whether a verdict can rest on it; a title or
    an owner bears on none.
    """

    kind: str
    name: str
    what: str
    how: str
    old: str | None
    new: str | None
    bears: bool
    old_location: Location | None = omitted()
    new_location: Location | None = omitted()


@record
class CriterionState:
    """A criterion as it stands on one side."""

    on: str
    arguments: Mapping[str, str]
    limit: LimitReview
    verdict: str
    standing: str
    result: Result
    reserve: ReserveReview | None


@record
class CriterionDifference:
    """A criterion whose verdict, standing, value or reserve is another now. changed: which of these."""

    measure: str
    old: CriterionState | None
    new: CriterionState | None
    changed: tuple[str, ...]


@record
class RequirementState:
    """A requirement as it stands on one side; methods: outcomes by method and stage."""

    id: str
    title: str | None
    owner: str | None
    verdict: str
    standing: str | None
    methods: Mapping[str, str]
    location: Location


@record
class RequirementDifference:
    """A requirement that came, went, or stands otherwise than before.

    judged: worse, better, mixed (worse in one thing, better in another) or changed. because: the changes that its
    results rest on, as kind and name. unexplained: a result is another although nothing that it rests on was changed:
    the tool or its method was. touched: documents that it rests on and whose issue or date is another.
    """

    id: str
    old: RequirementState | None
    new: RequirementState | None
    criteria: tuple[CriterionDifference, ...]
    judged: str
    changed: tuple[str, ...]
    because: tuple[str, ...]
    unexplained: bool
    touched: tuple[str, ...]


@record
class ResponseState:
    """A response as it runs on one side: deviation of a signal, in its unit."""

    signal: str
    unit: str
    curve: Curve | None


@record
class ResponseDifference:
    """A response that runs otherwise than before, and the requirements that are on it."""

    loop: str
    response: str
    old: ResponseState
    new: ResponseState
    requirements: tuple[str, ...]


@record
class Worsening:
    """One thing that got worse.

    kind: gate, verdict, standing, applicability, removed or finding. name: the requirement, or the rule of a finding.
    on: the criterion or method that it is about, where it is not the requirement as a whole.
    """

    kind: str
    name: str
    old: str | None
    new: str | None
    on: str | None = omitted()
    message: str | None = omitted()
    location: Location | None = omitted()


@record
class Differences:
    """All differences of two revisions, the worst first.

    outcome: `worse` or `not_worse`. worse: what got worse. changes: what was changed. remarks: what could not be
    compared, one sentence each.
    """

    format: int
    tool: ToolReview
    old: Side
    new: Side
    outcome: str
    worse: tuple[Worsening, ...]
    requirements: tuple[RequirementDifference, ...]
    changes: tuple[Change, ...]
    new_findings: tuple[FindingReview, ...]
    gone_findings: tuple[FindingReview, ...]
    responses: tuple[ResponseDifference, ...]
    remarks: tuple[str, ...] = ()
