"""The same response of two revisions in one plot: the new one a full line, the old one dashed and thinner."""

from __future__ import annotations

from specgate.report.figures import svg
from specgate.report.figures.scales import Scale, simplified, widened
from specgate.terms.records import record

WIDTH, HEIGHT = 640.0, 186.0
LEFT, RIGHT, TOP, BOTTOM = 58.0, 14.0, 24.0, 38.0
SMOOTH = 0.15
"""How far a drawn line may leave the points of its curve, pixels."""
DASHES = "6 3"
Curve = tuple[tuple[float, ...], tuple[float, ...]]


@record
class OverlayFigure:
    """Two curves of times (s) and values (`unit`)."""

    name: str
    title: str
    signal: str
    unit: str
    old: Curve
    new: Curve


def axes(figure: OverlayFigure) -> tuple[Scale, Scale]:
    """Return the scales of time and value, which hold both curves."""
    times = (*figure.old[0], *figure.new[0])
    values = (0.0, *figure.old[1], *figure.new[1])
    low, high = widened(min(values), max(values), 0.07)
    return Scale(min(0.0, *times), max(times) or 1.0, LEFT, WIDTH - RIGHT), Scale(low, high, HEIGHT - BOTTOM, TOP)


def draw(figure: OverlayFigure) -> str:
    """Return the figure as SVG."""
    x, y = axes(figure)
    return svg.figure(
        WIDTH,
        HEIGHT,
        figure.title,
        *_frame(figure, x, y),
        svg.path(_points(figure.old, x, y), svg.QUIET, 1.3, stroke_dasharray=DASHES),
        svg.path(_points(figure.new, x, y), svg.CURVE, 1.8),
        *_legend(),
        class_="plot",
    )


def _points(curve: Curve, x: Scale, y: Scale) -> list[tuple[float, float]]:
    return simplified([(x(t), y(v)) for t, v in zip(*curve, strict=True)], SMOOTH)


def _frame(figure: OverlayFigure, x: Scale, y: Scale) -> list[str]:
    bottom, right = HEIGHT - BOTTOM, WIDTH - RIGHT
    across, upwards = list(x.ticks(5)), list(y.ticks(4))
    ticks = [(x(value), bottom, x(value), bottom + 4) for value, _ in across]
    unit = f", {figure.unit}" if figure.unit not in ("", "1") else ""
    name = figure.signal if len(figure.signal) <= 60 else figure.signal[:59] + "…"
    return [
        svg.strokes([(LEFT, y(value), right, y(value)) for value, _ in upwards], svg.HAIR, 0.5),
        *(svg.text(LEFT - 5, y(value) + 3, label, anchor="end") for value, label in upwards),
        *(svg.text(x(value), bottom + 14, label, anchor="middle") for value, label in across),
        svg.strokes([(LEFT, bottom, right, bottom), (LEFT, TOP, LEFT, bottom), *ticks], svg.INK, 0.8),
        svg.text((LEFT + right) / 2, HEIGHT - 6, "time, s", anchor="middle", fill=svg.QUIET),
        svg.text(4, 12, f"{name}{unit}", fill=svg.QUIET),
    ]


def _legend() -> list[str]:
    """Return what each line is, over the frame on the right."""
    right, level = WIDTH - RIGHT, 9.0
    return [
        svg.line(right - 112, level, right - 84, level, svg.QUIET, 1.3, stroke_dasharray=DASHES),
        svg.text(right - 79, level + 3, "old"),
        svg.line(right - 52, level, right - 24, level, svg.CURVE, 1.8),
        svg.text(right - 19, level + 3, "new"),
    ]
