"""Where the claims stand: each basis that is an approximation, the ones out of range first."""

from __future__ import annotations

from specgate.report import anchors, digits
from specgate.report.figures.error import ErrorFigure
from specgate.report.figures.poles import PoleFigure
from specgate.report.figures.step import StepFigure
from specgate.report.parts import plots, shown, validity
from specgate.report.words import (
    CONDITIONS,
    SIDES,
    STANDINGS,
    VERDICTS,
    Status,
    amount,
    arguments,
    limit_in_words,
    spaced,
    titled,
    with_unit,
)
from specgate.review.types import BasisReview, ConditionReview, CriterionReview, Review
from specgate.terms.records import record

PICTURED_AT_MOST = 12
"""Claims that stand whose ranges a printed report shows in pictures."""


@record
class Condition:
    """A condition of an approximation."""

    name: str
    required: str
    found: str
    holds: Status
    source: str
    policy: str


@record
class Audit:
    """One basis, audited. One that stands, and agrees with its formula, is `brief`: a line says all of it."""

    brief: bool
    anchor: str
    requirement: str
    requirement_anchor: str
    text: str
    measure: str
    on: str
    limit: str
    standing: Status
    verdict: Status
    approximation: str
    claimed: str
    formula: str
    proved: shown.Shown
    error: str
    agreement: str
    accuracy: str
    implied: str
    conditions: tuple[tuple[str, tuple[Condition, ...]], ...]
    """By the approximation whose they are."""
    instead: str
    reason: str
    picture: StepFigure | None
    error_over_damping: ErrorFigure | None
    map: PoleFigure | None

    @property
    def pictured(self) -> bool:
        """Whether its range has pictures that no block of its own shows."""
        return self.brief and (self.error_over_damping is not None or self.map is not None)


def audits(review: Review) -> tuple[Audit, ...]:
    """Return the audits of all approximations that something rests on, worst standing first, then as written."""
    found = [
        _audit(review, name, number, criterion)
        for name, requirement in review.requirements.items()
        for number, criterion in enumerate(requirement.criteria)
        if criterion.basis.kind == "approximation"
    ]
    return tuple(sorted(found, key=lambda item: (item.standing.weight, item.verdict.weight)))


def _audit(review: Review, name: str, number: int, criterion: CriterionReview) -> Audit:
    basis, anchor = criterion.basis, anchors.audit(name, number)
    return Audit(
        brief=basis.standing == "sound" and basis.claim_agrees is not False,
        anchor=anchor,
        requirement=name,
        requirement_anchor=anchors.row(name),
        text=review.requirements[name].text,
        measure=titled(criterion.measure, review.definitions)
        + (f" ({arguments(criterion.arguments)})" if criterion.arguments else ""),
        on=criterion.on,
        limit=limit_in_words(criterion.limit),
        standing=STANDINGS[basis.standing],
        verdict=VERDICTS[criterion.verdict],
        approximation=_with_variant(" and ".join(spaced(item) for item in basis.chain), basis.variant),
        claimed=amount(basis.claimed) if basis.claimed else "no value claimed",
        formula=_formula(basis),
        proved=shown.result(criterion.result, criterion.limit),
        error=_error(basis),
        agreement=_agreement(basis),
        accuracy=basis.accuracy or "",
        implied=_implied(basis),
        conditions=_conditions(basis),
        instead=_instead(review, basis),
        reason="" if any(item.holds is False for item in basis.conditions) else basis.reason or "",
        picture=_picture(review, name, number, criterion),
        error_over_damping=validity.error_figure(basis, anchor),
        map=validity.map_figure(basis, anchor),
    )


def _with_variant(name: str, variant: str | None) -> str:
    return name if variant is None else f"{name} ({spaced(variant)})"


def _formula(basis: BasisReview) -> str:
    if basis.formula is None:
        return f"{basis.formula_text}: no value on this loop" if basis.formula_text else "no value on this loop"
    value = amount(basis.formula)
    return f"{basis.formula_text} = {value}" if basis.formula_text else value


def _error(basis: BasisReview) -> str:
    """Return the error of the formula against the proved value, signed, with its side."""
    if basis.error is None and basis.formula is None:
        return "not defined: the formula has no value on this loop"
    if basis.error is None:
        return "not defined: there is no proved value to compare with"
    parts = []
    if basis.error.relative is not None:
        parts.append(digits.signed(digits.percent(basis.error.relative)))
    if basis.error.absolute is not None and basis.error.absolute.value is not None:
        absolute = basis.error.absolute
        parts.append(with_unit(digits.signed(digits.number(absolute.value or 0.0)), absolute.unit))
    if basis.error.relative == 0 or (basis.error.relative is None and basis.error.side == "none"):
        return "none"
    size = f"{parts[0]} ({parts[1]})" if len(parts) == 2 else "".join(parts)
    return f"{size} {SIDES.get(basis.error.side, basis.error.side)}".strip()


def _agreement(basis: BasisReview) -> str:
    if basis.claim_agrees is None or basis.claimed is None:
        return ""
    return "agrees with its formula" if basis.claim_agrees else "disagrees with its formula"


def _implied(basis: BasisReview) -> str:
    if not basis.implied or basis.claimed is None:
        return ""
    if "upper" not in basis.implied:
        return with_unit(f"{digits.number(basis.implied['lower'])} or more", basis.claimed.unit)
    low, high = (digits.number(basis.implied[key]) for key in ("lower", "upper"))
    return with_unit(f"{low} … {high}", basis.claimed.unit)


def _conditions(basis: BasisReview) -> tuple[tuple[str, tuple[Condition, ...]], ...]:
    groups: dict[str, list[Condition]] = {}
    for item in basis.conditions:
        groups.setdefault(spaced(item.approximation), []).append(_condition(item))
    return tuple((name, tuple(items)) for name, items in groups.items())


def _condition(item: ConditionReview) -> Condition:
    if item.found is None:
        found = "undecided"
    else:
        found = item.found if isinstance(item.found, str) else digits.number(float(f"{item.found:.4g}"))
    return Condition(
        name=item.name,
        required=item.required.replace(">=", "≥").replace("<=", "≤"),
        found=found,
        holds=CONDITIONS[item.holds],
        source=item.source,
        policy=item.policy or "",
    )


def _instead(review: Review, basis: BasisReview) -> str:
    if basis.instead is None:
        return ""
    computed = basis.instead.name == "computed"
    title = "the computed value" if computed else titled(basis.instead.name, review.definitions)
    name = _with_variant(title, basis.instead.variant)
    if basis.instead.value is None:
        return f"{name}, of which there is none here" if computed else name
    return f"{name}: {with_unit(digits.number(basis.instead.value), basis.instead.unit)}"


def _picture(review: Review, name: str, number: int, criterion: CriterionReview) -> StepFigure | None:
    loop, _, subject = criterion.on.partition(".")
    if loop not in review.loops or subject not in review.loops[loop].responses:
        return None
    response = review.loops[loop].responses[subject]
    suffix = f"-{anchors.audit(name, number)}"
    return plots.response_figure(loop, subject, response, [(name, criterion)], suffix)
