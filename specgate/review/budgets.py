"""Budgets as they stand in a Review."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq

from specgate.compliance.assessment import BudgetAssessment, Contribution
from specgate.compliance.budgets import Sum
from specgate.compliance.scales import Bounds
from specgate.response.answers import Answer
from specgate.review.printing import printed_form, short
from specgate.review.types import Amount, BudgetReview, ShareReview, Span
from specgate.terms.enclosed import printed_exact
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Trilean


def budget(judged: BudgetAssessment) -> BudgetReview:
    """Print a budget."""
    declared, unit, whole = judged.budget, judged.unit or ONE, judged.whole
    given, used = judged.given, judged.used
    return BudgetReview(
        combine=declared.combine,
        level=_level(declared.level),
        reserve=None if declared.reserve is None else declared.reserve.as_written,
        limit=None if whole is None else _span(whole, unit),
        shares=tuple(_share(part, unit, _parts(given), _parts(used)) for part in judged.parts),
        given=None if given is None else _span(given.bounds, unit),
        used=None if used is None else _span(used.bounds, unit),
        allotted=_truth(judged.allotted),
        kept=_truth(judged.result),
        left_over=_amount(judged.left_over, unit),
        left=_amount(judged.left, unit),
        frequency=None if declared.frequency is None else declared.frequency.as_written,
        reason=judged.reason,
    )


def _share(part: Contribution, unit: Unit, given: Mapping[str, float], used: Mapping[str, float]) -> ShareReview:
    share = part.share
    return ShareReview(
        share.id,
        printed_exact(share.factor).value,
        None if part.given is None else _span(part.given, unit),
        None if part.found is None else _span(part.found, unit),
        _level(share.level),
        share.group,
        True if share.mean else None,
        given.get(share.id),
        used.get(share.id),
    )


def _parts(whole: Sum | None) -> Mapping[str, float]:
    return {} if whole is None else {name: printed_form(part, fmpq(1)).value for name, part in whole.parts.items()}


def _level(level: fmpq | None) -> str | None:
    return None if level is None else f"{short(level)} sigma"


def _span(interval: Bounds, unit: Unit) -> Span:
    return Span(_amount(interval.least, unit), _amount(interval.most, unit))


def _amount(answer: Answer | None, unit: Unit) -> Amount | None:
    if answer is None:
        return None
    form = printed_form(answer)
    return Amount(form.value, unit.symbol, form.exact)


def _truth(found: Trilean) -> bool | None:
    return None if found is Trilean.UNKNOWN else found is Trilean.YES
