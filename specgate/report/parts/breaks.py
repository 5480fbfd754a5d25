"""The opened loops on a sheet: margins with their frequencies and directions, crossings, and the picture of both."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Literal

from specgate.report import anchors, digits
from specgate.report.figures.frequency import REACH, FrequencyFigure, Mark
from specgate.report.figures.masks import Boundary
from specgate.report.parts import shown
from specgate.report.parts.measures import MeasureTable, table
from specgate.report.words import VERDICTS, Status, amount, limit, titled
from specgate.review.types import (
    Amount,
    BreakReview,
    CriterionReview,
    CrossingReview,
    DefinitionReview,
    FrequencyCurve,
    MaskReview,
    MeasureResult,
)
from specgate.terms.records import record

_DIRECTIONS = {"up": "more gain", "down": "less gain", "lag": "lag", "lead": "lead"}
_KINDS = {"gain": "gain 1", "phase": "phase ±180 deg"}


_FEWEST = 20
"""Points that a part of a curve has at least, to be drawn without the rest."""


@record
class MarginRow:
    """A number of an opened loop that is found at a frequency."""

    name: str
    result: shown.Shown
    value: str
    frequency: str
    direction: str


@record
class CrossingRow:
    """A crossing: what crosses, where, what is left there, and which way it is used up."""

    what: str
    frequency: str
    margin: str
    direction: str


@record
class BreakCriterion:
    """A limit that is put on an opened loop."""

    requirement: str
    anchor: str
    measure: str
    limit: str
    proved: str
    verdict: Status


@record
class BreakSheet:
    """A loop opened at a break."""

    name: str
    anchor: str
    at: str
    numerator: str
    denominator: str
    reason: str
    margins: tuple[MarginRow, ...]
    crossings: tuple[CrossingRow, ...]
    figure: FrequencyFigure | None
    criteria: tuple[BreakCriterion, ...]
    measures: MeasureTable


def sheet(
    loop: str,
    name: str,
    opened: BreakReview,
    criteria: Iterable[tuple[str, CriterionReview]],
    definitions: Mapping[str, DefinitionReview],
) -> BreakSheet:
    """Return what is shown of a break."""
    asked = list(criteria)
    placed = [m for m in opened.measures if m.at is not None and m.at.frequency is not None]
    variable = "s" if opened.in_z is None else "z"
    return BreakSheet(
        name=name,
        anchor=anchors.opened(loop, name),
        at=opened.at,
        numerator=shown.transfer(opened.numerator, opened.numerator_terms, variable),
        denominator=shown.transfer(opened.denominator, opened.denominator_terms, variable)
        if opened.denominator or opened.denominator_terms
        else "",
        reason=opened.reason or "",
        margins=_margins(placed, definitions),
        crossings=tuple(_crossing(one) for one in opened.crossings),
        figure=figure(loop, name, opened, [c for _, c in asked]),
        criteria=tuple(_criterion(requirement, c, definitions) for requirement, c in asked),
        measures=table([m for m in opened.measures if m not in placed], definitions),
    )


def _margins(placed: list[MeasureResult], definitions: Mapping[str, DefinitionReview]) -> tuple[MarginRow, ...]:
    results = [shown.result(m) for m in placed]
    values = digits.aligned([result.value for result in results])
    return tuple(
        MarginRow(
            name=titled(m.measure, definitions),
            result=result,
            value=value,
            frequency="" if m.at is None or m.at.frequency is None else _frequency(m.at.frequency),
            direction="" if m.at is None else _DIRECTIONS.get(m.at.direction or "", ""),
        )
        for m, result, value in zip(placed, results, values, strict=True)
    )


def _frequency(of: Amount) -> str:
    return "infinite" if of.infinite else amount(of)


def _crossing(one: CrossingReview) -> CrossingRow:
    return CrossingRow(
        what=_KINDS.get(one.kind, one.kind),
        frequency=_frequency(one.frequency),
        margin=amount(one.margin),
        direction=_DIRECTIONS.get(one.direction, one.direction),
    )


def _criterion(requirement: str, c: CriterionReview, definitions: Mapping[str, DefinitionReview]) -> BreakCriterion:
    return BreakCriterion(
        requirement=requirement,
        anchor=anchors.row(requirement),
        measure=titled(c.measure, definitions),
        limit=limit(c.limit),
        proved=shown.result(c.result, c.limit).whole,
        verdict=VERDICTS[c.verdict],
    )


def figure(
    loop: str, name: str, opened: BreakReview, criteria: Iterable[CriterionReview] = ()
) -> FrequencyFigure | None:
    """Return the picture of an opened loop with the masks that are laid over it, None where there are no points."""
    if opened.frequency_response is None or len(opened.frequency_response.frequency) < 2:
        return None
    curve = _within_reach(opened.frequency_response, opened.crossings)
    return FrequencyFigure(
        name=anchors.anchor("frequency", f"{loop}.{name}"),
        title=f"Gain and phase of {loop} opened at {name}, with what is left at each crossing",
        frequency=curve.frequency,
        gain=curve.gain_db,
        phase=curve.phase_deg,
        marks=tuple(_marks(opened, curve)),
        masks=tuple(boundary for c in criteria if c.mask is not None for boundary in _boundaries(c.mask)),
    )


def _boundaries(mask: MaskReview) -> Iterator[Boundary]:
    if mask.over == "frequency":
        sides: tuple[tuple[Literal["above", "below"], tuple[tuple[float, float], ...]], ...] = (
            ("above", mask.upper),
            ("below", mask.lower),
        )
        yield from (Boundary(corners, side, mask.forever) for side, corners in sides if corners)


def _within_reach(curve: FrequencyCurve, crossings: Iterable[CrossingReview]) -> FrequencyCurve:
    """Return the part of a curve from which something can be read: a gain not far from 0 dB, and every crossing."""
    crossed = [one.frequency.value for one in crossings if one.frequency.value is not None]
    near = [
        k
        for k, (at, gain) in enumerate(zip(curve.frequency, curve.gain_db, strict=True))
        if abs(gain) <= REACH or any(low <= at <= high for low, high in [(one / 2, one * 2) for one in crossed])
    ]
    if len(near) < _FEWEST:
        return curve
    part = slice(near[0], near[-1] + 1)
    return FrequencyCurve(curve.frequency[part], curve.gain_db[part], curve.phase_deg[part])


def _marks(opened: BreakReview, curve: FrequencyCurve) -> Iterator[Mark]:
    """Give a mark for each crossing that lies on the curves.

    The phase at a crossing of the gain less its lag (or with its lead) is half a turn; the gain at a crossing of the
    phase is away from 0 dB by what is left.
    """
    counted = {
        (m.value, m.at.direction)
        for m in opened.measures
        if m.at is not None and m.measure.startswith(("gain_margin", "phase_margin"))
    }
    for one in opened.crossings:
        at = one.frequency.value
        if at is None or one.margin.value is None or not curve.frequency[0] <= at <= curve.frequency[-1]:
            continue
        nearest = min(range(len(curve.frequency)), key=lambda k, at=at: abs(curve.frequency[k] - at))  # type: ignore[misc]
        size, least = one.margin.value, (one.margin.value, one.direction) in counted
        label = f"{amount(one.margin)} at {amount(one.frequency)}"
        if one.kind == "gain":
            level = curve.phase_deg[nearest]
            limit_at = level - size if one.direction == "lag" else level + size
            yield Mark("phase", at, level, 180.0 + 360.0 * round((limit_at - 180.0) / 360.0), label, least)
        else:
            yield Mark("gain", at, -size if one.direction == "up" else size, 0.0, label, least)
