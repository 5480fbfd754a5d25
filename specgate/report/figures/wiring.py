"""A loop as a picture of blocks, drawn from its equations; where it cannot be drawn well it is not drawn."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise

from specgate.report.figures import svg
from specgate.report.figures.wiring_graph import Graph, NotDrawable, graph
from specgate.report.figures.wiring_layout import layouts
from specgate.report.figures.wiring_shapes import Box, Layout, two_lines
from specgate.terms.records import record

MONO = "DejaVu Sans Mono"
MARGIN, BETWEEN = 6.0, 18.0
TALLEST = 560.0


@record
class WiringFigure:
    """What a loop's picture is drawn from; `channels` are its responses, from input to signal."""

    name: str
    title: str
    inputs: tuple[str, ...]
    wiring: Mapping[str, str]
    channels: tuple[tuple[str, str], ...]


def draw(figure: WiringFigure) -> str:
    """Return the picture as SVG, or nothing where the wiring does not make a readable one."""
    try:
        wired = graph(figure.inputs, figure.wiring)
        pictures = layouts(wired, figure.channels)
    except NotDrawable:
        return ""
    extents = [picture.extent() for picture in pictures]
    width = max((right - left for left, _, right, _ in extents), default=0.0) + 2 * MARGIN
    height = sum(bottom - top for _, top, _, bottom in extents) + BETWEEN * (len(pictures) - 1) + 2 * MARGIN
    if not pictures or height > TALLEST:
        return ""
    parts, down = [], MARGIN
    for picture, (left, top, _, bottom) in zip(pictures, extents, strict=True):
        parts.append(
            svg.tag(
                "g",
                *_picture(wired, picture),
                transform=f"translate({svg.short(MARGIN - left)} {svg.short(down - top)})",
            )
        )
        down += bottom - top + BETWEEN
    return svg.figure(width, height, figure.title, *parts, class_="plot")


def _picture(wired: Graph, picture: Layout) -> list[str]:
    segments, heads, dots = [], [], []
    for run in picture.runs:
        (x0, y0), (x1, y1) = run.corners[-2:]
        length = max(abs(x1 - x0), abs(y1 - y0)) or 1.0
        ux, uy = (x1 - x0) / length, (y1 - y0) / length
        back = (x1 - 6 * ux, y1 - 6 * uy)
        corners = [*run.corners[:-1], back]
        segments += [(*start, *end) for start, end in pairwise(corners)]
        wings = [(back[0] - 2.6 * uy, back[1] + 2.6 * ux), (back[0] + 2.6 * uy, back[1] - 2.6 * ux)]
        heads.append("L".join(f"{svg.short(x)} {svg.short(y)}" for x, y in [(x1, y1), *wings]))
        if run.tapped:
            dots.append(svg.tag("circle", cx=corners[0][0], cy=corners[0][1], r=2.0, fill=svg.INK, class_="f-ink"))
    lines = svg.strokes(segments, svg.INK, 0.9)
    arrows = svg.tag("path", d="".join(f"M{head}Z" for head in heads), fill=svg.INK, class_="f-ink")
    boxes = [part for box in picture.boxes.values() for part in _box(wired, box)]
    labels = [
        svg.text(label.x, label.y, label.words, 8, label.anchor, svg.QUIET, font_family=MONO)
        for label in picture.labels
    ]
    return [lines, arrows, *dots, *boxes, *labels]


def _box(wired: Graph, box: Box) -> list[str]:
    node = wired.nodes[box.node]
    frame = {"stroke": svg.INK, "stroke_width": 0.9, "fill": svg.PAPER, "class_": "s-ink f-paper"}
    if node.kind == "sum":
        return [svg.tag("circle", cx=box.x, cy=box.y, r=box.width / 2, **frame)]
    lines = two_lines(node.label) if node.kind == "block" else (node.label,)
    first = box.y + 3 - 5 * (len(lines) - 1)
    words = [svg.text(box.x, first + 10 * k, line, 8, "middle", font_family=MONO) for k, line in enumerate(lines)]
    if node.kind == "input":
        return words
    corner = {"rx": 7.0} if node.kind == "gain" else {}
    left, top = box.x - box.width / 2, box.y - box.height / 2
    return [svg.tag("rect", x=left, y=top, width=box.width, height=box.height, **corner, **frame), *words]
