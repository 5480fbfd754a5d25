"""Budgets: what shares together are allowed to use, and what they use."""

from __future__ import annotations

from specgate.review.types.fields import omitted
from specgate.review.types.values import Amount
from specgate.terms.records import record


@record
class Span:
    """An interval; an end is left out where there is none."""

    lower: Amount | None = omitted()
    upper: Amount | None = omitted()


@record
class ShareReview:
    """One share: a requirement or a subsystem, what is given to it, and what was found for it, without its factor.

    part_given, part_used: of the whole (of its variance, where combined by root-sum-square).
    """

    id: str
    factor: float
    given: Span | None
    used: Span | None
    level: str | None = omitted()
    group: str | None = omitted()
    mean: bool | None = omitted()
    part_given: float | None = omitted()
    part_used: float | None = omitted()


@record
class BudgetReview:
    """A budget, added up: by the limits of its shares (`given`), and by their results (`used`)."""

    combine: str
    level: str | None
    reserve: str | None
    limit: Span | None
    shares: tuple[ShareReview, ...]
    given: Span | None
    used: Span | None
    allotted: bool | None
    """Whether the limits of the shares keep the limit; null where that is not known."""
    kept: bool | None
    """Whether their results do."""
    left_over: Amount | None
    """What the limits leave of it."""
    left: Amount | None
    """What the results leave of it."""
    frequency: str | None = omitted()
    reason: str | None = omitted()
