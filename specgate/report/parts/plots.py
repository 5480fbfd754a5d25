"""From a response and the criteria on it to the figure that shows both."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Callable, Iterable, Sequence

from specgate.report.anchors import anchor
from specgate.report.digits import number
from specgate.report.figures.step import Cross, Edge, Ring, StepFigure
from specgate.report.parts import shown
from specgate.report.words import amount, edges, limit
from specgate.review.types import CriterionReview, Curve, MeasureResult, ResponseReview, Result

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
    )


class _Marks:
    """Collects what is drawn over one curve."""

    def __init__(self, response: ResponseReview, curve: Curve) -> None:
        self.curve = curve
        found = {m.measure: m for m in response.measures if _is_number(m)}
        self.final = _number(found.get("final_value"))
        self.unit = response.unit
        self.edges: list[Edge] = []
        self.crosses: list[Cross] = []
        self.rings: list[Ring] = []

    def add(self, requirement: str, criterion: CriterionReview) -> None:
        """Draw in a criterion, if its measure has a place in the picture."""
        if criterion.measure in INSTANTS:
            self._instant(requirement, criterion)
        elif criterion.measure in LEVELS:
            self._level(requirement, criterion)

    def _instant(self, requirement: str, criterion: CriterionReview) -> None:
        outside = self._band(criterion)
        for at, side in _sides(criterion):
            ground = outside if side == "above" else None
            label = f"{requirement}: {limit(criterion.limit)}"
            self.edges.append(Edge("time", at, side, label, ground))  # type: ignore[arg-type]
        level = self.final or 0.0
        proved = _number(criterion.result)
        if proved is not None:
            level = self._at(proved)
            self.crosses.append(Cross(proved, level, "time", *_interval(criterion.result, proved)))
        if criterion.basis.claimed is not None and criterion.basis.claimed.value is not None:
            self.rings.append(Ring(criterion.basis.claimed.value, level))

    def _level(self, requirement: str, criterion: CriterionReview) -> None:
        to_signal = self._to_signal(criterion)
        if to_signal is None:
            return
        ends = criterion.measure == "final_value"
        for at, side in _sides(criterion):
            for level, forbidden in _mirrored(criterion.measure, to_signal(at), side, to_signal(0.0)):
                label = f"{requirement}: {limit(criterion.limit)}"
                self.edges.append(Edge("value", level, forbidden, label, at_the_end=ends))  # type: ignore[arg-type]
        time = self._time_of(criterion.measure)
        proved = _number(criterion.result)
        if proved is not None:
            low, high = _interval(criterion.result, proved)
            self.crosses.append(Cross(time, to_signal(proved), "value", to_signal(low), to_signal(high)))
        if criterion.basis.claimed is not None and criterion.basis.claimed.value is not None:
            self.rings.append(Ring(time, to_signal(criterion.basis.claimed.value)))

    def _to_signal(self, criterion: CriterionReview) -> Callable[[float], float] | None:
        """Return what turns the measure's numbers into levels of the signal, where its units allow that."""
        unit = criterion.result.unit or next(
            (a.unit for a in (criterion.limit.at_most, criterion.limit.at_least) if a), ""
        )
        final = self.final
        if criterion.measure in ("overshoot", "undershoot"):
            if not final:
                return None
            size = abs(final) / 100 if unit == "%" else 1.0
            towards = (1 if final > 0 else -1) * size
            return (lambda v: final + towards * v) if criterion.measure == "overshoot" else (lambda v: -towards * v)
        if unit != self.unit:
            return None
        sign = -1 if criterion.measure == "peak_deviation" and self._at(self._time_of("peak_deviation")) < 0 else 1
        return lambda v: sign * v

    def _band(self, criterion: CriterionReview) -> tuple[float, float] | None:
        """Return the band about the final value, where the text of the argument gives it in per cent of the change."""
        words = criterion.arguments.get("band", "").split()
        if criterion.measure != "settling_time" or not self.final or len(words) < 2 or words[1] != "%":
            return None
        if words[2:] not in ([], ["of", "the", "change"]):
            return None
        half = abs(self.final) * float(words[0]) / 100
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


def _sides(criterion: CriterionReview) -> list[tuple[float, str]]:
    """Return the numbers at which a limit lies, each with its forbidden side."""
    numbers = edges(criterion.limit)
    if len(numbers) == 2:
        return [(min(numbers), "below"), (max(numbers), "above")]
    return [(at, "above" if criterion.limit.at_most is not None else "below") for at in numbers]


def _mirrored(measure: str, level: float, side: str, zero: float) -> list[tuple[float, str]]:
    """Return a limit as lines of the signal: turned over where the measure counts downwards, both for a magnitude."""
    if measure == "peak_deviation":
        outward = {"above": ("above", "below"), "below": ("below", "above")}[side]
        return [(abs(level), outward[0]), (-abs(level), outward[1])]
    if measure in ("overshoot", "undershoot") and level < zero:
        return [(level, {"above": "below", "below": "above"}[side])]
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
