"""What an audit and the audit that nobody asked for have in common: conditions and errors, printed."""

from __future__ import annotations

from flint import fmpq

from specgate.approximations.figures import combined
from specgate.compliance.assessment import AuditedCondition, FormulaError
from specgate.compliance.wording import found_value
from specgate.response.answers import Answer
from specgate.review.printing import amount_of, plain_number
from specgate.review.types import Amount, ConditionReview, ErrorReview
from specgate.terms.enclosed import ends, rounded
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Trilean


def error_of(error: FormulaError, unit: Unit) -> ErrorReview:
    """Print how far a formula is off; unit: of the absolute error."""
    relative = None if error.relative is None else plain_number(error.relative, fmpq(1))
    return ErrorReview(relative, error.side, _absolute(error, unit))


def _absolute(error: FormulaError, unit: Unit) -> Amount | None:
    """Print the difference; in decibels that is the ratio of both, not the level of a difference of ratios."""
    if unit.kind != "decibel":
        return amount_of(error.absolute, unit, _size(error.truth, unit))
    relative = error.relative
    return None if relative is None else amount_of(combined(lambda ratio: ratio + 1, relative), unit)


def _size(truth: Answer, unit: Unit) -> fmpq | None:
    """Return the truth to two digits, as what an error is small against."""
    size = rounded(ends(abs(truth.enclose(64)))[1], "up", 2) / unit.si_factor
    return size if size != 0 else None


def condition(audited: AuditedCondition) -> ConditionReview:
    """Print a condition with what was found."""
    holds = audited.found.holds
    return ConditionReview(
        key=audited.condition.key,
        name=audited.condition.named(audited.threshold),
        source=audited.condition.source,
        required=audited.condition.asked(audited.threshold),
        found=found_value(audited.found),
        holds=None if holds is Trilean.UNKNOWN else holds is Trilean.YES,
        approximation=audited.approximation,
        policy=audited.policy,
    )
