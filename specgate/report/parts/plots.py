"""From a response and the criteria on it to the figure that shows both."""

from __future__ import annotations

import math
import re
from bisect import bisect_left
from collections.abc import Callable, Iterable, Sequence
from typing import Literal

from specgate.report.anchors import anchor
from specgate.report.digits import number
from specgate.report.figures.masks import Boundary
from specgate.report.figures.step import Cross, Edge, Ring, StepFigure
from specgate.report.parts import shown
from specgate.report.parts.conversion import ratio
from specgate.report.words import amount, edges, limit
from specgate.review.types import CriterionReview, Curve, MaskReview, MeasureResult, ResponseReview, Result

Side = Literal["below", "above"]
_NUMBER = re.compile(r"[0-9]+(\.[0-9]*)?|\.[0-9]+")
INSTANTS = {"settling_time", "peak_time", "delay_time"}
"""Measures that are one instant of the response, counted from the start of the input."""
LEVELS = {"final_value", "initial_value", "maximum_value", "minimum_value", "peak_deviation", "overshoot", "undershoot"}
"""Measures that are one level of the response."""


def response_figure(
    loop: str, name: str, response: ResponseReview, criteria: Sequence[tuple[str, CriterionReview]], suffix: str = ""
) -> StepFigure | None:
    """Return the figure of a response with the criteria on it (each with its requirement); None without a curve."""
    curve = response.curve
    if curve is None or len(curve.time) < 2:
        return None
    title = f"Response of {response.to} to {response.from_} ({loop}.{name}) over {number(curve.time[-1])} s"
    marks = _Marks(response, curve)
    for requirement, criterion in criteria:
        marks.add(requirement, criterion)
    return StepFigure(
        name=anchor("plot", f"{loop}.{name}") + suffix,
        title="; ".join([title, *(f"{requirement}: {_said(criterion)}" for requirement, criterion in criteria)]),
        signal=response.to,
        unit=response.unit,
        time=curve.time,
        value=curve.value,
        final=marks.final,
        edges=tuple(marks.edges),
        crosses=tuple(marks.crosses),
        rings=tuple(marks.rings),
        masks=tuple(marks.masks),
    )


class _Marks:
    """Collects what is drawn over one curve, in seconds and in the unit of the signal."""

    def __init__(self, response: ResponseReview, curve: Curve) -> None:
        self.curve = curve
        found = {m.measure: m for m in response.measures if _is_number(m)}
        self.final = _number(found.get("final_value"))
        self.unit = response.unit
        self.edges: list[Edge] = []
        self.crosses: list[Cross] = []
        self.rings: list[Ring] = []
        self.masks: list[Boundary] = []

    def add(self, requirement: str, criterion: CriterionReview) -> None:
        """Draw in a criterion, if its measure has a place in the picture."""
        if criterion.measure in INSTANTS:
            self._instant(requirement, criterion)
        elif criterion.measure in LEVELS:
            self._level(requirement, criterion)
        elif criterion.mask is not None and criterion.mask.over == "time":
            self._mask(criterion, criterion.mask)

    def _mask(self, criterion: CriterionReview, mask: MaskReview) -> None:
        """Draw in a mask, and a cross where it is first left."""
        size = (self.final or 0.0) / 100 if mask.unit == "%" and self.unit != "%" else ratio(mask.unit, self.unit)
        if not size:
            return
        sides: tuple[Side, Side] = ("above", "below") if size > 0 else ("below", "above")
        for side, corners in zip(sides, (mask.upper, mask.lower), strict=True):
            if corners:
                points = tuple((time, value * size) for time, value in corners)
                self.masks.append(Boundary(points, side, mask.forever))
        at = criterion.result.at
        if at is not None and at.time is not None and at.value is not None:
            time, value = at.time.value, at.value.value
            factor = ratio(at.value.unit, self.unit)
            if time is not None and value is not None and factor is not None:
                self.crosses.append(Cross(time, value * factor, "value", value * factor, value * factor))

    def _instant(self, requirement: str, criterion: CriterionReview) -> None:
        seconds = ratio(_unit(criterion) or "s", "s")
        if seconds is None:
            return
        outside = self._band(criterion)
        label = f"{requirement}: {limit(criterion.limit)}"
        for at, side in _sides(criterion):
            self.edges.append(Edge("time", at * seconds, side, label, outside if side == "above" else None))
        level = self.final or 0.0
        proved = _number(criterion.result)
        if proved is not None:
            low, high = _interval(criterion.result, proved)
            level = self._at(proved * seconds)
            self.crosses.append(Cross(proved * seconds, level, "time", low * seconds, high * seconds))
        claim = criterion.basis.claimed
        claimed = ratio(claim.unit, "s") if claim is not None else None
        if claim is not None and claim.value is not None and claimed is not None:
            self.rings.append(Ring(claim.value * claimed, level))

    def _level(self, requirement: str, criterion: CriterionReview) -> None:
        to_signal = self._to_signal(criterion.measure, _unit(criterion))
        if to_signal is None:
            return
        ends = criterion.measure == "final_value"
        label = f"{requirement}: {limit(criterion.limit)}"
        for at, side in _sides(criterion):
            for level, forbidden in _mirrored(criterion.measure, to_signal(at), side, to_signal(0.0)):
                self.edges.append(Edge("value", level, forbidden, label, at_the_end=ends))
        time = self._time_of(criterion.measure)
        proved = _number(criterion.result)
        if proved is not None:
            low, high = _interval(criterion.result, proved)
            self.crosses.append(Cross(time, to_signal(proved), "value", to_signal(low), to_signal(high)))
        claim = criterion.basis.claimed
        if claim is not None and claim.value is not None:
            claimed = self._to_signal(criterion.measure, claim.unit)
            if claimed is not None:
                self.rings.append(Ring(time, claimed(claim.value)))

    def _to_signal(self, measure: str, unit: str) -> Callable[[float], float] | None:
        """Return what turns a measure's numbers in `unit` into levels of the signal, where its units allow that."""
        if measure in ("overshoot", "undershoot"):
            # Per cent are those of the change; where the signal itself is in per cent, its own are called points.
            size = None if not self.final else abs(self.final) / 100 if unit == "%" else ratio(unit, self.unit)
            if not self.final or size is None:
                return None
            final, towards = self.final, math.copysign(size, self.final)
            return (lambda v: final + towards * v) if measure == "overshoot" else (lambda v: -towards * v)
        factor = ratio(unit, self.unit)
        if factor is None:
            return None
        downwards = measure == "peak_deviation" and self._at(self._time_of("peak_deviation")) < 0
        return lambda v: (-factor if downwards else factor) * v

    def _band(self, criterion: CriterionReview) -> tuple[float, float] | None:
        """Return the band about the final value: per cent of the change, or a distance like the signal's own."""
        number, _, unit = criterion.arguments.get("band", "").partition(" ")
        if criterion.measure != "settling_time" or self.final is None or not _NUMBER.fullmatch(number):
            return None
        relative = unit in ("%", "% of the change", "% of change")
        size = abs(self.final) / 100 if relative else ratio(unit, self.unit)
        if size is None:
            return None
        half = size * float(number)
        return self.final - half, self.final + half

    def _at(self, time: float) -> float:
        times, values = self.curve.time, self.curve.value
        k = bisect_left(times, time)
        if k == 0 or k == len(times):
            return values[min(k, len(times) - 1)]
        share = (time - times[k - 1]) / (times[k] - times[k - 1]) if times[k] > times[k - 1] else 0.0
        return values[k - 1] + share * (values[k] - values[k - 1])

    def _time_of(self, measure: str) -> float:
        """Return where along the curve a level is marked: the curve holds its own extremes."""
        times, values = self.curve.time, self.curve.value
        if measure == "final_value":
            return times[-1]
        if measure == "initial_value":
            return times[0]
        sign = -1 if (self.final or 0.0) < 0 else 1
        keys: dict[str, Callable[[float], float]] = {
            "maximum_value": lambda v: v,
            "minimum_value": lambda v: -v,
            "peak_deviation": abs,
            "overshoot": lambda v: sign * v,
            "undershoot": lambda v: -sign * v,
        }
        key = keys[measure]
        return times[max(range(len(values)), key=lambda k: key(values[k]))]


def _unit(criterion: CriterionReview) -> str:
    """Return the unit of a limit: that of its result too, where there is one."""
    of = criterion.limit
    amounts = (of.at_most, of.at_least, of.within, *(of.between or ()))
    return criterion.result.unit or next((amount.unit for amount in amounts if amount is not None), "")


def _sides(criterion: CriterionReview) -> list[tuple[float, Side]]:
    """Return the numbers at which a limit lies, each with its forbidden side."""
    numbers = edges(criterion.limit)
    if len(numbers) == 2:
        return [(min(numbers), "below"), (max(numbers), "above")]
    return [(at, "above" if criterion.limit.at_most is not None else "below") for at in numbers]


def _mirrored(measure: str, level: float, side: Side, zero: float) -> list[tuple[float, Side]]:
    """Return a limit as lines of the signal: turned over where the measure counts downwards, both for a magnitude."""
    other: Side = "below" if side == "above" else "above"
    if measure == "peak_deviation":
        return [(abs(level), side), (-abs(level), other)]
    if measure in ("overshoot", "undershoot") and level < zero:
        return [(level, other)]
    return [(level, side)]


def _is_number(found: Result) -> bool:
    return isinstance(found.value, int | float) and not isinstance(found.value, bool)


def _number(found: Result | None) -> float | None:
    if found is None or isinstance(found.value, bool | None):
        return None
    return float(found.value)


def _interval(found: Result, value: float) -> tuple[float, float]:
    return (value if found.lower is None else found.lower, value if found.upper is None else found.upper)


def _said(criterion: CriterionReview) -> str:
    """Return what the marks of a criterion show, for those who cannot see them."""
    words = f"{limit(criterion.limit)}, proved {shown.result(criterion.result, criterion.limit).whole}"
    claim = criterion.basis.claimed
    return words if claim is None or claim.value is None else f"{words}, claimed {amount(claim)}"


def drawn(criterion: CriterionReview) -> bool:
    """Tell whether the proved value of a criterion has a place in the picture."""
    return criterion.measure in INSTANTS | LEVELS and _number(criterion.result) is not None


def measures_of(measures: Iterable[MeasureResult]) -> dict[str, MeasureResult]:
    """Return measures by name; the first of a name where it was read with several arguments."""
    found: dict[str, MeasureResult] = {}
    for item in measures:
        found.setdefault(item.measure, item)
    return found
