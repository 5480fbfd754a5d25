"""The reserve of a criterion as a small bar to scale: the limit in the middle, inside to the right, outside left."""

from __future__ import annotations

from specgate.report.figures import svg
from specgate.terms.records import record

WIDTH, HEIGHT = 72.0, 11.0
FULL = 1.0
"""Relative reserve at the ends of the scale: the whole limit."""


@record
class ReserveBar:
    """A reserve relative to its limit (1: the whole limit), positive inside; `title` says it in words."""

    relative: float
    title: str


def draw(bar: ReserveBar) -> str:
    """Return the bar as SVG; what runs off the scale ends in a point."""
    middle, half = WIDTH / 2, WIDTH / 2 - 6
    length = min(1.0, abs(bar.relative) / FULL) * half
    inside = bar.relative >= 0
    colour = svg.ALLOWED if inside else svg.FORBIDDEN
    start = middle if inside else middle - length
    kind = "f" + svg.colour_class(colour)[1:]
    parts = [svg.line(6, HEIGHT / 2, WIDTH - 6, HEIGHT / 2, svg.HAIR, 0.7)]
    parts.append(svg.rectangle(start, 3, max(length, 0.6), HEIGHT - 6, colour, class_=kind))
    if abs(bar.relative) > FULL:
        tip, base = (WIDTH - 0.5, WIDTH - 6) if inside else (0.5, 6)
        parts.append(
            svg.tag("path", d=f"M{base} 1.5L{tip} {HEIGHT / 2}L{base} {HEIGHT - 1.5}Z", fill=colour, class_=kind)
        )
    parts.append(svg.line(middle, 0, middle, HEIGHT, width=1.0))
    return svg.figure(WIDTH, HEIGHT, bar.title, *parts, class_="bar")
