"""A sheet for each loop: wiring, poles, responses with their limits drawn in, all measures."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping

from specgate.report import anchors, digits
from specgate.report.figures.poles import Point, PoleFigure
from specgate.report.figures.step import StepFigure
from specgate.report.figures.wiring import WiringFigure
from specgate.report.parts import breaks, plots, sampled, shown
from specgate.report.parts.breaks import BreakSheet
from specgate.report.parts.measures import Comparison, MeasureTable, comparisons, table
from specgate.report.words import VERDICTS, Status, counted, limit, titled
from specgate.review.types import (
    CriterionReview,
    DefinitionReview,
    HiddenMode,
    LoopReview,
    Pole,
    ResponseReview,
    Review,
)
from specgate.terms.records import record

Criteria = list[tuple[str, CriterionReview]]


@record
class Signal:
    """A signal and how it is made."""

    name: str
    made_of: str
    unit: str
    rest: str


@record
class PoleRow:
    """A pole, or a pair of them, in numbers; `time_constant` is that of its decay."""

    value: str
    multiplicity: int
    frequency: str
    damping: str
    time_constant: str
    bound: str
    unstable: bool


@record
class CriterionRow:
    """A limit drawn in a figure."""

    requirement: str
    anchor: str
    measure: str
    limit: str
    proved: str
    drawn: bool
    claimed: str
    verdict: Status


@record
class ResponseSheet:
    """A response."""

    name: str
    anchor: str
    source: str
    target: str
    drive: str
    unit: str
    numerator: str
    denominator: str
    zeros: str
    reason: str
    figure: StepFigure | None
    criteria: tuple[CriterionRow, ...]
    measures: MeasureTable


@record
class Hidden:
    """A hidden mode in a sentence."""

    response: str
    polynomial: str
    poles: str
    stable: bool


@record
class LoopSheet:
    """A loop."""

    name: str
    anchor: str
    title: str
    reason: str
    stable: Status | None
    inputs: tuple[Signal, ...]
    signals: tuple[Signal, ...]
    diagram: WiringFigure
    characteristic: str
    order: str
    poles: tuple[PoleRow, ...]
    hidden: tuple[Hidden, ...]
    map: PoleFigure | None
    measures: MeasureTable
    responses: tuple[ResponseSheet, ...]
    comparisons: tuple[Comparison, ...]
    breaks: tuple[BreakSheet, ...]


STABLE = Status("compliant", "stable", "●", 1)
UNSTABLE = Status("non_compliant", "not stable", "◆", 0)


def sheets(review: Review) -> tuple[LoopSheet, ...]:
    """Return the sheets of all loops, as written."""
    subjects: dict[str, Criteria] = {}
    for name, requirement in review.requirements.items():
        for criterion in requirement.criteria:
            subjects.setdefault(criterion.on, []).append((name, criterion))
    return tuple(_sheet(name, loop, review, subjects) for name, loop in review.loops.items())


def _sheet(name: str, loop: LoopReview, review: Review, subjects: Mapping[str, Criteria]) -> LoopSheet:
    known = plots.measures_of(loop.measures)
    stable = known["stable"].value if "stable" in known else None
    return LoopSheet(
        name=name,
        anchor=anchors.sheet(name),
        title=loop.title or name,
        reason=loop.reason or "",
        stable=None if stable is None else STABLE if stable else UNSTABLE,
        inputs=tuple(Signal(name, "from outside", unit, loop.rest.get(name, "")) for name, unit in loop.inputs.items()),
        signals=tuple(
            Signal(signal, made_of, loop.signal_units.get(signal, ""), loop.rest.get(signal, ""))
            for signal, made_of in loop.wiring.items()
        ),
        diagram=WiringFigure(
            name=anchors.anchor("wiring", name),
            title=f"Wiring of {name}, as in the table below",
            inputs=tuple(loop.inputs),
            wiring=loop.wiring,
            channels=tuple((response.from_, response.to) for response in loop.responses.values()),
        ),
        characteristic=_characteristic(loop),
        order="with dead time: modes without end"
        if loop.characteristic_terms
        else counted(max(0, len(loop.characteristic_polynomial) - 1), "mode"),
        poles=pole_rows(sampled.poles(loop)),
        hidden=tuple(_hidden(mode) for mode in loop.hidden_modes),
        map=_map(name, loop),
        measures=table(loop.measures, review.definitions),
        responses=tuple(
            _response(
                name,
                key,
                response,
                loop.characteristic_polynomial,
                review.definitions,
                subjects.get(f"{name}.{key}", []),
            )
            for key, response in loop.responses.items()
        ),
        comparisons=comparisons(loop.responses, review.definitions),
        breaks=tuple(
            breaks.sheet(name, key, opened, subjects.get(f"{name}.{key}", []), review.definitions)
            for key, opened in loop.breaks.items()
        ),
    )


def _characteristic(loop: LoopReview) -> str:
    """Return the characteristic polynomial, in z of a sampled loop, or the sum of terms that it is with dead time."""
    if not loop.characteristic_polynomial and not loop.characteristic_terms:
        return ""
    variable = "s" if loop.in_z is None else "z"
    return shown.transfer(loop.characteristic_polynomial, loop.characteristic_terms, variable)


def _response(
    loop: str,
    name: str,
    response: ResponseReview,
    characteristic: tuple[str, ...],
    definitions: Mapping[str, DefinitionReview],
    criteria: Criteria,
) -> ResponseSheet:
    return ResponseSheet(
        name=name,
        anchor=anchors.plot(loop, name),
        source=response.from_,
        target=response.to,
        drive=_drive(response.input),
        unit=response.unit,
        numerator=shown.transfer(response.numerator, response.numerator_terms),
        denominator=_denominator(response, characteristic),
        zeros=_listed(response.zeros),
        reason=response.reason or "",
        figure=plots.response_figure(loop, name, response, criteria),
        criteria=tuple(_criterion(requirement, c, definitions) for requirement, c in criteria),
        measures=table(response.measures, definitions),
    )


def _drive(given: Mapping[str, str]) -> str:
    """Say what drives a response: of a step its size alone, of all else every quantity by its name."""
    kind = given["kind"].replace("_", " ")
    others = {name: text for name, text in given.items() if name != "kind"}
    if kind == "several":
        return "; ".join(f"{text.replace('_', ' ')} on {source}" for source, text in others.items())
    if len(others) == 1:
        return f"{kind} {next(iter(others.values()))}"
    counted = ["times from the end of the ramp"] if others.pop("count_from", "start") == "end_of_ramp" else []
    return f"{kind}, {', '.join([*(f'{name} {text}' for name, text in others.items()), *counted])}"


def _denominator(response: ResponseReview, characteristic: tuple[str, ...]) -> str:
    """Return the denominator of a response, or that it is the loop's characteristic polynomial."""
    if not response.denominator and not response.denominator_terms:
        return ""
    same = response.denominator == characteristic and not response.denominator_terms
    return "the characteristic polynomial" if same else shown.transfer(response.denominator, response.denominator_terms)


def _criterion(requirement: str, c: CriterionReview, definitions: Mapping[str, DefinitionReview]) -> CriterionRow:
    claimed = c.basis.claimed
    return CriterionRow(
        requirement=requirement,
        anchor=anchors.row(requirement),
        measure=titled(c.measure, definitions),
        limit=limit(c.limit),
        proved=shown.result(c.result, c.limit).whole,
        drawn=plots.drawn(c),
        claimed="" if claimed is None or claimed.value is None else f"{digits.number(claimed.value)} {claimed.unit}",
        verdict=VERDICTS[c.verdict],
    )


def pole_rows(poles: Iterable[Pole]) -> tuple[PoleRow, ...]:
    """Return poles as rows, a conjugate pair as one."""
    return tuple(_pole_row(pole) for pole in poles if pole.imaginary >= 0)


def _pole_row(pole: Pole) -> PoleRow:
    size = math.hypot(pole.real, pole.imaginary)
    imaginary = f" ± {digits.number(pole.imaginary)}j" if pole.imaginary else ""
    return PoleRow(
        value=digits.number(pole.real) + imaginary,
        multiplicity=pole.multiplicity,
        frequency=digits.number(size) if pole.imaginary else "",
        damping=digits.number(_four(-pole.real / size)) if pole.imaginary else "",
        time_constant=digits.number(_four(-1 / pole.real)) if pole.real < 0 else "",
        bound="exact" if pole.radius == 0 else digits.half_width(0.0, -pole.radius, pole.radius),
        unstable=pole.real >= 0,
    )


def _four(value: float) -> float:
    """Return a number derived for the reader, to four digits: it is not proved and claims no more."""
    return float(f"{value:.4g}")


def _listed(points: Iterable[Pole]) -> str:
    rows = pole_rows(points)
    return ",  ".join(r.value + (f" (×{r.multiplicity})" if r.multiplicity > 1 else "") for r in rows)


def _hidden(mode: HiddenMode) -> Hidden:
    return Hidden(mode.response, shown.polynomial(mode.polynomial), _listed(mode.poles), mode.stable)


def _map(name: str, loop: LoopReview) -> PoleFigure | None:
    hidden = {(p.real, p.imaginary) for mode in loop.hidden_modes for p in mode.poles}
    points = [
        Point("hidden" if (p.real, p.imaginary) in hidden else "pole", p.real, p.imaginary, p.multiplicity)
        for p in sampled.poles(loop)
    ]
    zeros = dict.fromkeys((z.real, z.imaginary, z.multiplicity) for r in loop.responses.values() for z in r.zeros)
    points += [Point("zero", *zero) for zero in zeros]
    title = f"Poles of {name} and zeros of its responses in the s plane"
    return PoleFigure(anchors.anchor("poles", name), title, tuple(points)) if points else None
