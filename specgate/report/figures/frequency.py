"""An opened loop over frequency: its gain above its phase, and what is left at each crossing as a bar."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import Literal

from specgate.report.digits import MINUS
from specgate.report.figures import masks, svg
from specgate.report.figures.masks import Boundary
from specgate.report.figures.scales import LogScale, Scale, clipped, simplified, widened
from specgate.terms.records import record

WIDTH, HEIGHT = 640.0, 290.0
LEFT, RIGHT = 58.0, 14.0
GAIN, PHASE = (18.0, 128.0), (154.0, 254.0)
"""Top and bottom of the two panels, pixels."""
SMOOTH = 0.15
"""How far a drawn line may leave the points of its curve, pixels."""
REACH = 70.0
"""How far from 0 dB a gain is drawn, unless a mark lies beyond."""
LABELS_AT_MOST = 4


@record
class Mark:
    """A crossing: at `frequency` from `level` on its curve (dB or deg) to `limit`, which is at the limit of stability.

    `least`: it is the one that a margin counts from; `label` says what is left.
    """

    panel: Literal["gain", "phase"]
    frequency: float
    level: float
    limit: float
    label: str
    least: bool


@record
class FrequencyFigure:
    """What is drawn of an opened loop: rad/s, dB and deg."""

    name: str
    title: str
    frequency: tuple[float, ...]
    gain: tuple[float, ...]
    phase: tuple[float, ...]
    marks: tuple[Mark, ...] = ()
    masks: tuple[Boundary, ...] = ()


def axes(figure: FrequencyFigure) -> tuple[LogScale, Scale, Scale]:
    """Return the scales of frequency, gain and phase: the curves and all marks, the gain only within reach of 0 dB."""
    across = LogScale(figure.frequency[0], figure.frequency[-1], LEFT, WIDTH - RIGHT)
    ends = [value for mark in figure.marks if mark.panel == "gain" for value in (mark.level, mark.limit)]
    low = min(0.0, max(-REACH, min(figure.gain)), *ends)
    high = max(0.0, min(REACH, max(figure.gain)), *ends)
    turned = [value for mark in figure.marks if mark.panel == "phase" for value in (mark.level, mark.limit)]
    lag, lead = min(*figure.phase, *turned, -180.0), max(*figure.phase, *turned)
    room = lead - lag or 1.0
    return (
        across,
        Scale(*widened(low, high, 0.06), GAIN[1], GAIN[0]),
        Scale(lag - 0.24 * room, lead + 0.08 * room, PHASE[1], PHASE[0]),
    )


def draw(figure: FrequencyFigure) -> str:
    """Return the figure as SVG."""
    x, gain, phase = axes(figure)
    shown = [mark for mark in figure.marks if x.holds(mark.frequency)]
    hatch = f"hatch-{figure.name}"
    return svg.figure(
        WIDTH,
        HEIGHT,
        figure.title,
        *_across(x),
        *_panel(gain, GAIN, "gain, dB", _levels(gain, (1, 2, 5, 10, 20, 40, 60, 100)), [0.0]),
        *_panel(phase, PHASE, "phase, deg", _levels(phase, (15, 30, 45, 90, 180, 360, 720)), _critical(phase)),
        *([svg.hatching(hatch)] if figure.masks else []),
        *(part for mask in figure.masks for part in masks.draw(mask, x, gain, _panel_of(GAIN), hatch)),
        *_curve(figure.frequency, figure.gain, x, gain),
        *_curve(figure.frequency, figure.phase, x, phase),
        *(_bar(mark, x, gain if mark.panel == "gain" else phase) for mark in shown),
        *_labels(shown, x, gain, phase),
        class_="plot",
    )


def _panel_of(ends: tuple[float, float]) -> tuple[float, float, float, float]:
    return LEFT, ends[0], WIDTH - RIGHT, ends[1]


def _across(x: LogScale) -> Iterator[str]:
    decades = list(x.decades())
    for top, bottom in (GAIN, PHASE):
        yield svg.strokes([(x(value), top, x(value), bottom) for value, _ in decades], svg.HAIR, 0.5)
        fine = [(x(value), bottom, x(value), bottom - 3) for value in x.between()]
        yield svg.strokes(fine, svg.QUIET, 0.5)
    for value, label in decades:
        yield svg.text(x(value), PHASE[1] + 14, label, anchor="middle")
    yield svg.text((LEFT + WIDTH - RIGHT) / 2, HEIGHT - 6, "frequency, rad/s", anchor="middle", fill=svg.QUIET)


def _panel(
    y: Scale, ends: tuple[float, float], name: str, levels: Sequence[tuple[float, str]], critical: Sequence[float]
) -> Iterator[str]:
    """Give the frame of a panel; `critical` are the levels on which a crossing lies."""
    right = WIDTH - RIGHT
    yield svg.strokes([(LEFT, y(value), right, y(value)) for value, _ in levels], svg.HAIR, 0.5)
    for value, label in levels:
        yield svg.text(LEFT - 5, y(value) + 3, label, anchor="end")
    yield svg.strokes([(LEFT, y(value), right, y(value)) for value in critical], svg.QUIET, 1.0, stroke_dasharray="5 3")
    yield svg.strokes([(LEFT, ends[1], right, ends[1]), (LEFT, ends[0], LEFT, ends[1])], svg.INK, 0.8)
    yield svg.text(4, ends[0] - 7, name, fill=svg.QUIET)


def _levels(y: Scale, steps: Sequence[int]) -> list[tuple[float, str]]:
    """Return round levels, about four of them, with their texts."""
    step = next((one for one in steps if (y.high - y.low) / one <= 5), 360 * math.ceil((y.high - y.low) / 1800))
    first, last = math.ceil(y.low / step), math.floor(y.high / step)
    return [(float(k * step), str(k * step).replace("-", MINUS)) for k in range(first, last + 1)]


def _critical(y: Scale) -> list[float]:
    """Return the phases that are half a turn, in the order of the axis."""
    first, last = math.ceil((y.low - 180) / 360), math.floor((y.high - 180) / 360)
    return [180.0 + 360.0 * k for k in range(first, last + 1)]


def _curve(frequency: Sequence[float], values: Sequence[float], x: LogScale, y: Scale) -> Iterator[str]:
    points = [(x(f), value) for f, value in zip(frequency, values, strict=True)]
    for piece in clipped(points, y.low, y.high):
        yield svg.path(simplified([(at, y(value)) for at, value in piece], SMOOTH), svg.CURVE, 1.6)


def _bar(mark: Mark, x: LogScale, y: Scale) -> str:
    """Return what is left at a crossing: from the curve to the limit, a foot on the limit, a dot on the curve."""
    at, level, limit = x(mark.frequency), y(mark.level), y(mark.limit)
    width = 2.2 if mark.least else 1.1
    bar = svg.strokes([(at, level, at, limit), (at - 4, limit, at + 4, limit)], svg.ALLOWED, width)
    dot = {"r": 2.6 if mark.least else 1.8, "fill": svg.ALLOWED, "class_": "f" + svg.colour_class(svg.ALLOWED)[1:]}
    return bar + svg.tag("circle", cx=at, cy=level, **dot)


def _labels(marks: Sequence[Mark], x: LogScale, gain: Scale, phase: Scale) -> Iterator[str]:
    """Give the labels of the marks that margins count from, beyond the limit at their foot, none over another.

    Curves fall: above a limit there is room to the right, below it to the left.
    """
    taken: list[tuple[float, float]] = []
    for mark in [one for one in marks if one.least][:LABELS_AT_MOST]:
        y = gain if mark.panel == "gain" else phase
        above = mark.limit > mark.level
        at, level = x(mark.frequency), y(mark.limit) + (-5 if above else 11)
        if any(abs(at - other) < 150 and abs(level - height) < 11 for other, height in taken):
            continue
        taken.append((at, level))
        length = 4.6 * len(mark.label)
        left = at + length > WIDTH - RIGHT if above else at - length > LEFT
        yield svg.text(at + (4 if left else -4), level, mark.label, 8, "end" if left else "start", svg.ALLOWED)
