"""Limits along a mask: a line through the corners, hatched on its forbidden side."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Literal

from specgate.report.figures import svg
from specgate.report.figures.scales import clipped
from specgate.terms.records import record

STRIP = 9.0
"""Breadth of the hatching along a limit, pixels."""


@record
class Boundary:
    """A limit: corners as (place, value), the side on which nothing may lie; `forever`: the last value goes on."""

    points: tuple[tuple[float, float], ...]
    forbidden: Literal["above", "below"]
    forever: bool = False


def draw(
    boundary: Boundary,
    x: Callable[[float], float],
    y: Callable[[float], float],
    panel: tuple[float, float, float, float],
    hatch: str,
) -> Iterator[str]:
    """Give a limit as SVG. panel: left, top, right and bottom in pixels; hatch: the name of the hatching."""
    left, top, right, bottom = panel
    corners = [(x(at), y(value)) for at, value in boundary.points]
    if boundary.forever and corners and corners[-1][0] < right:
        corners.append((right, corners[-1][1]))
    away = -STRIP if boundary.forbidden == "above" else STRIP
    for across in clipped([(py, px) for px, py in corners], left, right):
        for piece in clipped([(px, py) for py, px in across], top, bottom):
            beyond = [(px, min(max(py + away, top), bottom)) for px, py in reversed(piece)]
            outline = " ".join(f"{svg.short(px)},{svg.short(py)}" for px, py in (*piece, *beyond))
            yield svg.tag("polygon", points=outline, fill=f"url(#{hatch})")
            yield svg.path(piece, svg.FORBIDDEN, 1.1)
