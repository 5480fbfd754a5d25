"""Formulas of the catalogue against what nobody has claimed anything of by them."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.review.types.bases import ConditionReview, ErrorReview
from specgate.review.types.fields import omitted
from specgate.review.types.values import Amount, Result
from specgate.terms.records import record


@record
class FormulaReview:
    """A formula of the catalogue against a response or a break of which nobody has claimed anything by it.

    applies: whether every condition holds (None: undecided). failing: the conditions that do not, then the undecided.
    error: of the formula; its unsafe side is the one that promises more than there is.
    """

    approximation: str
    measure: str
    arguments: Mapping[str, str] | None
    formula_text: str
    formula: Amount | None
    proved: Result
    error: ErrorReview | None
    applies: bool | None
    failing: tuple[ConditionReview, ...] = ()
    accuracy: str | None = omitted()
    """Stated accuracy of a formula that applies."""
    variant: str | None = omitted()
    reason: str | None = omitted()
    """Why the formula has no value."""


@record
class FormulasReview:
    """All formulas against one response or break: those that hold first, by the size of their error."""

    rows: tuple[FormulaReview, ...]
    absent: Mapping[str, str]
    """Measures that have no value there, and why: no formula can give one."""
    reason: str | None = omitted()
    """Why no formula of the catalogue is for it."""
