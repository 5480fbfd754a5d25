"""Requirements with their criteria, ranges and verdicts."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from specgate.review.types.bases import BasisReview
from specgate.review.types.budgets import BudgetReview
from specgate.review.types.fields import omitted
from specgate.review.types.records import EvidenceReview, WaiverReview
from specgate.review.types.values import Amount, Location, Result
from specgate.terms.records import record


@record
class LimitReview:
    """A limit: exactly one of the keys is set."""

    at_most: Amount | None = omitted()
    at_least: Amount | None = omitted()
    between: tuple[Amount, Amount] | None = omitted()
    within: Amount | None = omitted()
    of: Amount | None = omitted()
    equals: bool | int | None = omitted()


@record
class ReserveReview:
    """Distance to the limit, positive inside, in the limit's unit."""

    value: float | None
    unit: str
    relative: float | None = None
    infinite: bool | None = omitted()


@record
class MaskReview:
    """Limits along a mask for drawing, 6 digits: corners as (s or rad/s, value), two at one place a jump.

    over: `time` or `frequency`. unit: of the values; % is of the change. forever: the last values go on.
    """

    over: str
    unit: str
    upper: tuple[tuple[float, float], ...]
    lower: tuple[tuple[float, float], ...]
    forever: bool


@record
class CriterionReview:
    """One limit of a requirement: what was found, the verdict, the audit."""

    measure: str
    on: str
    arguments: Mapping[str, str]
    limit: LimitReview
    evaluate: str
    verdict: str
    result: Result
    reserve: ReserveReview | None
    basis: BasisReview
    standing: str
    """The worst of the standing of the basis and of the ranges and models that the criterion rests on."""
    location: Location
    mask: MaskReview | None = omitted()
    reason: str | None = omitted()


@record
class MethodReview:
    """A verification method and how it stands: a verdict, `due_later`, or `no_record`."""

    method: str
    stage: str | None
    outcome: str
    evidence: tuple[str, ...] | None = omitted()
    """Ids of the records of this kind, where there are any."""


@record
class AssumptionReview:
    """A range that the verdict rests on: where, how far the response goes from rest, how far it may."""

    kind: str
    """`linear_range` or `rate_range`."""
    response: str
    signal: str | None
    """The signal of the loop that the port carries; None for one without a name."""
    subsystem: str
    side: str
    port: str
    rest: Amount
    low: Amount
    high: Amount
    peak: Result | None
    """Greatest distance from rest, or greatest rate; None where a bound alone was taken (only the text output)."""
    allowed: Amount
    """From rest to the nearer end; negative where rest is outside."""
    holds: bool | None
    largest_size: Amount | None
    """The largest size of the input that keeps the range, rounded down; None where it has no one size."""
    largest_factor: float | None
    reason: str | None = omitted()
    """Why there is no peak, or why the question is open."""


@record
class FigureReview:
    """A number with its name; `value` is null where there is none."""

    name: str
    value: Amount


@record
class ModelAssumptionReview:
    """Something that the models of blocks take for granted under a requirement, beside the ranges of signals.

    holds: None where nobody can tell. standing: what it leaves to whatever rests on it.
    """

    kind: str
    on: str
    """The response, break or loop."""
    subsystem: str | None
    """Whose model it is; None where it is the loop's."""
    holds: bool | None
    standing: str
    words: str
    figures: tuple[FigureReview, ...]
    location: Location


@record
class RequirementReview:
    """A requirement with its verdict. Verdict is `not_applicable` where it does not apply."""

    text: str
    title: str | None
    rationale: str | None
    owner: str | None
    location: Location
    derived_from: tuple[str, ...]
    allocated_to: tuple[str, ...]
    verdict: str
    standing: str | None
    decided_by: str
    methods: tuple[MethodReview, ...]
    criteria: tuple[CriterionReview, ...]
    assumptions: tuple[AssumptionReview | ModelAssumptionReview, ...] = ()
    rests_on: tuple[str, ...] = ()
    derived: tuple[str, ...] = ()
    """Ids of the requirements derived from it."""
    evidence: tuple[EvidenceReview, ...] = ()
    waiver: WaiverReview | None = None
    """The first waiver that excuses something; the verdict stays what it is."""
    waivers: tuple[WaiverReview, ...] = ()
    budget: BudgetReview | None = omitted()
    waived: bool = False
    """Whether waivers, of its own or of what is derived from it, keep its not being met from holding the gate."""
    reason: str | None = None
    """Why it is not compliant, in one sentence."""
    not_applicable: Mapping[str, Any] | None = None
    external: Mapping[str, Any] | None = None
    coverage: Mapping[str, Any] | None = omitted()
    """Whether the requirements derived from it are declared to cover it, by whom and when."""
