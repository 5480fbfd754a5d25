"""Poles and zeros in the s plane: the right half, where nothing may lie, is hatched; rays of equal damping behind."""

from __future__ import annotations

import math
from typing import Literal

from specgate.report.digits import number
from specgate.report.figures import svg
from specgate.report.figures.scales import Scale
from specgate.terms.records import record

WIDTH, HEIGHT = 310.0, 200.0
LEFT, RIGHT, TOP, BOTTOM = 40.0, 12.0, 16.0, 34.0
CROWD = 12.0
"""Points more than this many times farther out than the middle one are named at the edge instead of drawn."""
ROOM = 90.0
"""What the longest words beside a line take, pixels."""
BESIDE = 26.0
"""A pair nearer than this to the imaginary axis has its name to the left, pixels."""
DAMPINGS = (0.2, 0.4, 0.6, 0.8)


@record
class Point:
    """A pole, a hidden pole or a zero, 1/s."""

    kind: Literal["pole", "hidden", "zero"]
    real: float
    imaginary: float
    multiplicity: int = 1


@record
class Separation:
    """How far from a dominant pair everything else has to be, 1/s.

    real_part: poles have to lie left of it. distance: what has to lie outside of the circle about the origin is said
    by `outside` (nothing: there is nothing to ask it of). real, imaginary: the upper pole of the pair.
    """

    real_part: float | None
    distance: float | None
    outside: str
    real: float
    imaginary: float

    @property
    def reach(self) -> float:
        """The distance from the origin that has to be seen."""
        return max(-(self.real_part or 0.0), self.distance or 0.0)


@record
class PoleFigure:
    """What is drawn in the s plane; with `separation`, how far poles and zeros have to be from the dominant pair."""

    name: str
    title: str
    points: tuple[Point, ...]
    separation: Separation | None = None


def _near(figure: PoleFigure) -> tuple[tuple[Point, ...], tuple[Point, ...]]:
    points = figure.points
    sizes = sorted(abs(complex(p.real, p.imaginary)) for p in points)
    within = CROWD * max(sizes[len(sizes) // 2], 1e-9)
    if figure.separation is not None:
        within = 2 * max(figure.separation.reach, sizes[0])
    near = tuple(p for p in points if abs(complex(p.real, p.imaginary)) <= within)
    return near, tuple(p for p in points if p not in near)


def draw(figure: PoleFigure) -> str:
    """Return the figure as SVG; both axes have one scale where that leaves both legible."""
    near, far = _near(figure)
    reach = 0.0 if figure.separation is None else figure.separation.reach
    wide = max(max((abs(p.real) for p in near), default=0.0), reach, 1e-9)
    tall = max(max((abs(p.imaginary) for p in near), default=0.0), 0.35 * wide)
    wide = max(wide, 0.35 * tall)
    right = max(0.22 * wide, 1.25 * max((p.real for p in near), default=0.0))
    x = Scale(-1.15 * wide, right, LEFT, WIDTH - RIGHT)
    y = Scale(-1.25 * tall, 1.25 * tall, HEIGHT - BOTTOM, TOP)
    hatch = f"hatch-{figure.name}"
    return svg.figure(
        WIDTH,
        HEIGHT,
        figure.title,
        svg.hatching(hatch),
        svg.rectangle(x(0), TOP, WIDTH - RIGHT - x(0), HEIGHT - BOTTOM - TOP, f"url(#{hatch})", fill_opacity=0.45),
        *_rays(x, y, labelled=figure.separation is None),
        *_frame(x, y),
        *(_asked(figure.separation, x, y) if figure.separation is not None else []),
        *(_mark(point, x, y) for point in near),
        *_outside(far),
        class_="plot",
    )


def _frame(x: Scale, y: Scale) -> list[str]:
    bottom, right = HEIGHT - BOTTOM, WIDTH - RIGHT
    across, upwards = list(x.ticks(5)), list(y.ticks(5))
    parts = [svg.text(x(value), bottom + 13, label, 8, "middle") for value, label in across]
    parts += [svg.text(LEFT - 6, y(value) + 3, label, 8, "end") for value, label in upwards]
    ticks = [(x(value), bottom, x(value), bottom + 4) for value, _ in across]
    ticks += [(LEFT - 4, y(value), LEFT, y(value)) for value, _ in upwards]
    axes = [(LEFT, bottom, right, bottom), (LEFT, TOP, LEFT, bottom), (x(0), TOP, x(0), bottom)]
    parts.append(svg.strokes([*axes, *ticks], svg.INK, 0.8))
    parts.append(svg.line(LEFT, y(0), right, y(0), svg.QUIET, 0.6))
    parts.append(svg.text((LEFT + right) / 2, HEIGHT - 6, "real part, 1/s", 8, "middle", svg.QUIET))
    parts.append(svg.text(2, 9, "imaginary part, 1/s", 8, fill=svg.QUIET))
    return parts


def _rays(x: Scale, y: Scale, *, labelled: bool) -> list[str]:
    """Draw a ray for each damping, with its figure where the upper one leaves the frame."""
    rays, labels = [], []
    for damping in DAMPINGS:
        slope = math.sqrt(1 - damping**2) / damping
        real = min(-x.low, y.high / slope)
        rays += [(x(0), y(0), x(-real), y(side * real * slope)) for side in (1, -1)]
        labels.append(svg.text(x(-real) + 3, y(real * slope) + 9, f"{damping}", 7, fill=svg.QUIET))
    return [svg.strokes(rays, svg.HAIR, 0.6), *(labels if labelled else [])]


def _asked(separation: Separation, x: Scale, y: Scale) -> list[str]:
    """Draw the line left of which other poles have to lie, and the circle outside of which."""
    upper, beside = x(separation.real), x(0) - x(separation.real) < BESIDE
    at, end = (upper - 7, "end") if beside else (upper + 7, "start")
    parts = [svg.text(at, y(separation.imaginary) + 3, "pair", 7, end, svg.QUIET)]
    if separation.real_part is not None and x.holds(separation.real_part):
        at = x(separation.real_part)
        parts.append(svg.line(at, TOP, at, HEIGHT - BOTTOM, svg.FORBIDDEN, 1.0, stroke_dasharray="5 3"))
        parts.append(_to_the_left(at, y(0) + 14, "◁ other poles"))
    if separation.distance is not None and separation.outside:
        radius = separation.distance
        around = [math.pi / 2 + math.pi * k / 60 for k in range(61)]
        arc = [(radius * math.cos(a), radius * math.sin(a)) for a in around]
        inside = [(x(real), y(imaginary)) for real, imaginary in arc if x.holds(real) and y.holds(imaginary)]
        if len(inside) > 1:
            parts.append(svg.path(inside, svg.FORBIDDEN, 1.0, stroke_dasharray="2 3"))
            parts.append(_to_the_left(x(-radius), y(0) - 8, f"outside: {separation.outside}"))
    return parts


def _to_the_left(at: float, level: float, words: str) -> str:
    """Write words on the side of a line where things may lie, or right of it where there is no room."""
    room = at - LEFT > ROOM
    return svg.text(at - 4 if room else at + 4, level, words, 7, "end" if room else "start", svg.FORBIDDEN)


def _mark(point: Point, x: Scale, y: Scale) -> str:
    at, level, r = x(point.real), y(point.imaginary), 4.0
    if point.kind == "zero":
        mark = svg.tag(
            "circle", cx=at, cy=level, r=r, fill="none", stroke=svg.CURVE, stroke_width=1.4, class_="s-curve"
        )
    else:
        colour = svg.FORBIDDEN if point.real >= 0 else svg.INK
        saltire = [(at - r, level - r, at + r, level + r), (at - r, level + r, at + r, level - r)]
        mark = svg.strokes(saltire, colour, 1.6)
    if point.kind == "hidden":
        mark += svg.tag(
            "rect",
            x=at - 6.5,
            y=level - 6.5,
            width=13,
            height=13,
            fill="none",
            stroke=svg.CLAIM,
            stroke_width=1.2,
            class_="s-claim",
        )
    if point.multiplicity > 1:
        mark += svg.text(at + 6, level - 5, f"×{point.multiplicity}", 8)
    return mark


def _outside(points: tuple[Point, ...]) -> list[str]:
    """Name the points that lie too far out to be drawn, at the left edge."""
    shown = [p for p in points if p.imaginary >= 0]
    words = [
        ("○ " if p.kind == "zero" else "✕ ")
        + number(p.real, 3)
        + (f" ± {number(p.imaginary, 3)}j" if p.imaginary else "")
        for p in shown[:3]
    ]
    rest = f", {len(shown) - 3} more" if len(shown) > 3 else ""
    return [svg.text(LEFT + 4, HEIGHT - BOTTOM - 5, "◁ " + ",  ".join(words) + rest, 8)] if words else []
