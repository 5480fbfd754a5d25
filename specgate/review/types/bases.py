"""What a claim of compliance rests on, audited."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.review.types.fields import omitted
from specgate.review.types.values import Amount, Pole
from specgate.terms.records import record


@record
class ConditionReview:
    """A condition of an approximation: what it requires, what was found, whether it holds (None: undecided)."""

    key: str
    name: str
    source: str
    required: str
    found: float | str | None
    holds: bool | None
    approximation: str = ""
    policy: str | None = omitted()
    """Set where the project changed the threshold."""


@record
class ErrorReview:
    """Signed error of a formula against the proved value; side is safe, unsafe or none."""

    relative: float | None
    side: str
    absolute: Amount | None = omitted()


@record
class InsteadReview:
    """What to use instead of an approximation that does not stand."""

    name: str
    value: float | None
    unit: str
    variant: str | None = omitted()
    """Which of its formulas, where it has several."""


@record
class PointReview:
    """Where a response stands in a picture: its damping ratio and the error of the formula on it."""

    damping: float
    error: float | None


@record
class ErrorCurveReview:
    """The error of a formula (formula / true - 1) for the pair alone, over the damping ratio of the pair.

    lower, upper: damping ratios between which the formula's own conditions hold.
    """

    damping: tuple[float, ...]
    error: tuple[float, ...]
    lower: float | None
    upper: float | None
    here: PointReview


@record
class SeparationReview:
    """Poles and zeros about the dominant pair at real ± imaginary j (1/s), and how far from it they have to be.

    real_part: other poles have to lie left of it. distance: zeros (other poles too, if `poles_too`) have to lie at
    least so far from the origin.
    """

    real: float
    imaginary: float
    poles: tuple[Pole, ...]
    zeros: tuple[Pole, ...]
    real_part: float | None
    distance: float | None
    poles_too: bool


@record
class BasisReview:
    """The audit of a basis. For `computed` and `evidence` only kind and standing are set."""

    kind: str
    standing: str
    chain: tuple[str, ...] = ()
    """The approximations that it rests on: premises first, the one that estimates the measure last."""
    claimed: Amount | None = None
    formula: Amount | None = None
    formula_text: str | None = None
    error: ErrorReview | None = None
    claim_agrees: bool | None = None
    implied: Mapping[str, float] | None = None
    """What the stated accuracy leaves for the true value: lower, and upper if there is an end (unit of the claim)."""
    accuracy: str | None = None
    conditions: tuple[ConditionReview, ...] = ()
    instead: InsteadReview | None = None
    reason: str | None = omitted()
    variant: str | None = omitted()
    """Which formula of the last of the chain, where it has several."""
    error_curve: ErrorCurveReview | None = omitted()
    separation: SeparationReview | None = omitted()
