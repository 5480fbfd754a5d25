"""A response over time: limits hatched on their forbidden side, proved values as crosses, claims as open rings."""

from __future__ import annotations

from typing import Literal

from specgate.report.figures import masks, svg
from specgate.report.figures.masks import STRIP, Boundary
from specgate.report.figures.scales import Scale, simplified, widened
from specgate.terms.records import record

WIDTH, HEIGHT = 640.0, 186.0
LEFT, RIGHT, TOP, BOTTOM = 58.0, 14.0, 24.0, 38.0
_PANEL = (LEFT, TOP, WIDTH - RIGHT, HEIGHT - BOTTOM)
SMOOTH = 0.15
"""How far the drawn line may leave the points of the curve, pixels."""


@record
class Edge:
    """A limit: a line at `at` on an axis, with the side on which nothing may lie.

    `outside` (a low and a high value) turns the limit on a time into the ground that the response may not enter.
    """

    axis: Literal["time", "value"]
    at: float
    forbidden: Literal["below", "above"]
    label: str
    outside: tuple[float, float] | None = None
    at_the_end: bool = False


@record
class Cross:
    """A proved value, with the interval that is proved to hold it along one axis."""

    time: float
    value: float
    axis: Literal["time", "value"]
    low: float
    high: float


@record
class Ring:
    """A claimed value."""

    time: float
    value: float


@record
class StepFigure:
    """What is drawn of a response. `time` in seconds against `value` in `unit`, as deviations from rest."""

    name: str
    title: str
    signal: str
    unit: str
    time: tuple[float, ...]
    value: tuple[float, ...]
    final: float | None = None
    edges: tuple[Edge, ...] = ()
    crosses: tuple[Cross, ...] = ()
    rings: tuple[Ring, ...] = ()
    masks: tuple[Boundary, ...] = ()


def axes(figure: StepFigure) -> tuple[Scale, Scale]:
    """Return the scales of time and value: the curve and whatever lies within reach of it."""
    end = figure.time[-1] or 1.0
    times = [c.time for c in figure.crosses] + [r.time for r in figure.rings]
    times += [e.at for e in figure.edges if e.axis == "time"]
    last = max([end, *(t * 1.06 for t in times if end < t <= 2.5 * end)])
    low, high = min(0.0, *figure.value), max(0.0, *figure.value)
    reach = high - low or 1.0
    levels = [c.value for c in figure.crosses] + [r.value for r in figure.rings]
    levels += [e.at for e in figure.edges if e.axis == "value"]
    levels += [v for e in figure.edges if e.outside for v in e.outside]
    levels += [v for mask in figure.masks for t, v in mask.points if t <= last]
    near = [v for v in levels if low - reach <= v <= high + reach]
    low, high = widened(min([low, *near]), max([high, *near]), 0.07)
    first = min(0.0, figure.time[0])
    return Scale(first, last, LEFT, WIDTH - RIGHT), Scale(low, high, HEIGHT - BOTTOM, TOP)


def draw(figure: StepFigure) -> str:
    """Return the figure as SVG."""
    x, y = axes(figure)
    hatch = f"hatch-{figure.name}"
    points = [(x(t), y(v)) for t, v in zip(figure.time, figure.value, strict=True)]
    curve = svg.path(simplified(points, SMOOTH), svg.CURVE, 1.6)
    shown = [edge for edge in figure.edges if (x if edge.axis == "time" else y).holds(edge.at)]
    return svg.figure(
        WIDTH,
        HEIGHT,
        figure.title,
        svg.hatching(hatch),
        *_frame(figure, x, y),
        *(_forbidden(edge, x, y, hatch) for edge in shown),
        *_limit_lines(figure, shown, x, y),
        *(part for mask in figure.masks for part in masks.draw(mask, x, y, _PANEL, hatch)),
        curve,
        *(_ring(ring, x, y) for ring in figure.rings if x.holds(ring.time) and y.holds(ring.value)),
        *(_cross(cross, x, y) for cross in figure.crosses if x.holds(cross.time) and y.holds(cross.value)),
        class_="plot",
    )


def _frame(figure: StepFigure, x: Scale, y: Scale) -> list[str]:
    bottom, right = HEIGHT - BOTTOM, WIDTH - RIGHT
    across, upwards = list(x.ticks(5)), list(y.ticks(4))
    parts = [svg.strokes([(LEFT, y(value), right, y(value)) for value, _ in upwards], svg.HAIR, 0.5)]
    parts += [svg.text(LEFT - 5, y(value) + 3, label, anchor="end") for value, label in upwards]
    parts += [svg.text(x(value), bottom + 14, label, anchor="middle") for value, label in across]
    if figure.final is not None and y.holds(figure.final):
        level = y(figure.final)
        parts.append(svg.line(LEFT, level, right, level, svg.QUIET, 0.7, stroke_dasharray="5 3"))
    ticks = [(x(value), bottom, x(value), bottom + 4) for value, _ in across]
    parts.append(svg.strokes([(LEFT, bottom, right, bottom), (LEFT, TOP, LEFT, bottom), *ticks], svg.INK, 0.8))
    parts.append(svg.text((LEFT + right) / 2, HEIGHT - 6, "time, s", anchor="middle", fill=svg.QUIET))
    unit = f", {figure.unit}" if figure.unit not in ("", "1") else ""
    name = figure.signal if len(figure.signal) <= 40 else figure.signal[:39] + "…"
    parts.append(svg.text(4, 12, f"{name}{unit}", fill=svg.QUIET))
    return parts


def _forbidden(edge: Edge, x: Scale, y: Scale, hatch: str) -> str:
    fill = f"url(#{hatch})"
    above = edge.forbidden == "above"
    if edge.axis == "value":
        level = y(edge.at)
        left = LEFT + 0.72 * (WIDTH - RIGHT - LEFT) if edge.at_the_end else LEFT
        top, bottom = (max(TOP, level - STRIP), level) if above else (level, min(HEIGHT - BOTTOM, level + STRIP))
        return svg.rectangle(left, top, WIDTH - RIGHT - left, bottom - top, fill)
    start, end = (x(edge.at), WIDTH - RIGHT) if above else (LEFT, x(edge.at))
    if edge.outside is None:
        start, end = (start, min(end, start + STRIP)) if above else (max(start, end - STRIP), end)
        return svg.rectangle(start, TOP, end - start, HEIGHT - BOTTOM - TOP, fill)
    high, low = (min(max(y(v), TOP), HEIGHT - BOTTOM) for v in (max(edge.outside), min(edge.outside)))
    upper = svg.rectangle(start, TOP, end - start, high - TOP, fill, fill_opacity=0.6)
    return upper + svg.rectangle(start, low, end - start, HEIGHT - BOTTOM - low, fill, fill_opacity=0.6)


def _limit_lines(figure: StepFigure, edges: list[Edge], x: Scale, y: Scale) -> list[str]:
    parts = []
    taken: list[float] = []
    for edge in sorted(edges, key=lambda e: (e.axis, e.at)):
        if edge.axis == "time":
            at = x(edge.at)
            parts.append(svg.line(at, TOP - 3, at, HEIGHT - BOTTOM, svg.FORBIDDEN, 1.1))
            for level in (edge.outside or ())[:2]:
                parts.append(svg.line(at, y(level), WIDTH - RIGHT, y(level), svg.FORBIDDEN, 0.8))
            parts.append(_label(edge.label, at, TOP - 6, taken))
        else:
            level = y(edge.at)
            left = LEFT + 0.72 * (WIDTH - RIGHT - LEFT) if edge.at_the_end else LEFT
            parts.append(svg.line(left, level, WIDTH - RIGHT, level, svg.FORBIDDEN, 1.1))
            parts += _level_label(figure, edge, x, y)
    return parts


def _level_label(figure: StepFigure, edge: Edge, x: Scale, y: Scale) -> list[str]:
    """Return the label of a limit on a level, at the end where the curve leaves more room."""
    right = WIDTH - RIGHT
    if edge.at_the_end:
        if edge.forbidden == "below":
            return []
        left = LEFT + 0.72 * (right - LEFT)
        return [svg.text(left - 4, y(edge.at) + 3, edge.label, 8, "end", svg.FORBIDDEN)]
    level = y(edge.at) + (10 if edge.forbidden == "above" else -4)
    length = 4.6 * len(edge.label)
    ends = [(LEFT + 5, "start", LEFT, LEFT + length), (right - 4, "end", right - length, right)]
    at, anchor, _, _ = max(ends, key=lambda end: _room(figure, x, y, level, end[2], end[3]))
    return [svg.text(at, level, edge.label, 8, anchor, svg.FORBIDDEN)]


def _room(figure: StepFigure, x: Scale, y: Scale, level: float, start: float, end: float) -> float:
    """Return how near the curve comes to a level between two pixels of the time axis."""
    points = zip(figure.time, figure.value, strict=True)
    return min((abs(y(v) - level) for t, v in points if start <= x(t) <= end), default=HEIGHT)


def _label(content: str, at: float, baseline: float, taken: list[float]) -> str:
    """Return a label over the frame, to the side where there is room, left out where another one stands already."""
    if any(abs(at - other) < 70 for other in taken):
        return ""
    taken.append(at)
    anchor = "end" if at > WIDTH * 0.8 else "start" if at < WIDTH * 0.2 else "middle"
    return svg.text(at, baseline, content, 8, anchor, svg.FORBIDDEN)


def _cross(cross: Cross, x: Scale, y: Scale) -> str:
    at, level, half = x(cross.time), y(cross.value), 4.5
    saltire = [(at - half, level - half, at + half, level + half), (at - half, level + half, at + half, level - half)]
    parts = [svg.strokes(saltire, svg.PAPER, 4.5), svg.strokes(saltire, svg.INK, 1.7)]
    scale = x if cross.axis == "time" else y
    low, high = (scale(min(max(v, scale.low), scale.high)) for v in (cross.low, cross.high))
    if abs(high - low) > 2 * half:
        ends = ((low, level, high, level), (at, low, at, high))[cross.axis == "value"]
        parts.append(svg.line(*ends, width=2.0))
    return "".join(parts)


def _ring(claim: Ring, x: Scale, y: Scale) -> str:
    halo, ring = (
        svg.tag(
            "circle",
            cx=x(claim.time),
            cy=y(claim.value),
            r=5.0,
            fill="none",
            stroke=stroke,
            stroke_width=width,
            class_=svg.colour_class(stroke),
        )
        for stroke, width in ((svg.PAPER, 4.0), (svg.CLAIM, 1.8))
    )
    return halo + ring
