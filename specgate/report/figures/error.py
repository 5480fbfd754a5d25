"""The error of a formula over damping ratio: a line for the pair alone, a ring for this loop, hatched out of range."""

from __future__ import annotations

from specgate.report.figures import svg
from specgate.report.figures.scales import Scale, simplified, widened
from specgate.terms.records import record

WIDTH, HEIGHT = 310.0, 200.0
LEFT, RIGHT, TOP, BOTTOM = 44.0, 10.0, 16.0, 34.0
SMOOTH = 0.15
"""How far the drawn line may leave the points of the curve, pixels."""
LEAST_HALF = 1.0
"""The scale of errors reaches at least so far to both sides, per cent."""


@record
class ErrorFigure:
    """The error of a formula (1: as great as the truth) over the damping ratio of a pair.

    lower, upper: where the formula's own conditions hold. here: damping ratio and error on this loop.
    """

    name: str
    title: str
    damping: tuple[float, ...]
    error: tuple[float, ...]
    lower: float | None
    upper: float | None
    here: tuple[float, float] | None


def draw(figure: ErrorFigure) -> str:
    """Return the figure as SVG."""
    x, y = axes(figure)
    hatch = f"hatch-{figure.name}"
    points = [(x(damping), y(100 * error)) for damping, error in zip(figure.damping, figure.error, strict=True)]
    return svg.figure(
        WIDTH,
        HEIGHT,
        figure.title,
        svg.hatching(hatch),
        *_outside(figure, x, f"url(#{hatch})"),
        *_frame(x, y),
        svg.path(simplified(points, SMOOTH), svg.CURVE, 1.4),
        *_ring(figure, x, y),
        class_="plot",
    )


def axes(figure: ErrorFigure) -> tuple[Scale, Scale]:
    """Return the scales of damping ratio and of error in per cent, in pixels."""
    errors = [*figure.error, *([figure.here[1]] if figure.here else [])]
    low, high = widened(min(-LEAST_HALF, 100 * min(errors)), max(LEAST_HALF, 100 * max(errors)), 0.08)
    return Scale(figure.damping[0], 1.0, LEFT, WIDTH - RIGHT), Scale(low, high, HEIGHT - BOTTOM, TOP)


def _outside(figure: ErrorFigure, x: Scale, fill: str) -> list[str]:
    """Hatch the damping ratios at which the formula's own conditions do not hold."""
    inner = HEIGHT - BOTTOM - TOP
    if figure.lower is None or figure.upper is None:
        return [svg.rectangle(LEFT, TOP, WIDTH - RIGHT - LEFT, inner, fill, fill_opacity=0.45)]
    parts = []
    if figure.lower > min(figure.damping):
        parts.append(svg.rectangle(LEFT, TOP, x(figure.lower) - LEFT, inner, fill, fill_opacity=0.45))
    if figure.upper < max(figure.damping):
        start = x(figure.upper)
        parts.append(svg.rectangle(start, TOP, WIDTH - RIGHT - start, inner, fill, fill_opacity=0.45))
    return parts


def _frame(x: Scale, y: Scale) -> list[str]:
    bottom, right = HEIGHT - BOTTOM, WIDTH - RIGHT
    across, upwards = list(x.ticks(5)), list(y.ticks(5))
    parts = [svg.text(x(value), bottom + 13, label, 8, "middle") for value, label in across]
    parts += [
        svg.text(LEFT - 6, y(value) + 3, f"+{label}" if value > 0 and label != "0" else label, 8, "end")
        for value, label in upwards
    ]
    ticks = [(x(value), bottom, x(value), bottom + 4) for value, _ in across]
    ticks += [(LEFT - 4, y(value), LEFT, y(value)) for value, _ in upwards]
    parts.append(svg.strokes([(LEFT, bottom, right, bottom), (LEFT, TOP, LEFT, bottom), *ticks], svg.INK, 0.8))
    parts.append(svg.line(LEFT, y(0), right, y(0), svg.QUIET, 0.8))
    parts.append(svg.text((LEFT + right) / 2, HEIGHT - 6, "damping ratio of the pair", 8, "middle", svg.QUIET))
    parts.append(svg.text(2, 9, "error of the formula, %", 8, fill=svg.QUIET))
    return parts


def _ring(figure: ErrorFigure, x: Scale, y: Scale) -> list[str]:
    if figure.here is None:
        return []
    at, level = x(figure.here[0]), y(100 * figure.here[1])
    guide = svg.line(at, TOP, at, HEIGHT - BOTTOM, svg.CLAIM, 0.7, stroke_dasharray="3 3")
    ring = svg.tag("circle", cx=at, cy=level, r=4.0, fill="none", stroke=svg.CLAIM, stroke_width=1.8, class_="s-claim")
    return [guide, ring]
