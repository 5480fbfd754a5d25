"""The few elements of SVG that the figures use.

Colours stand as presentation attributes, which print; the class beside them lets the styles of the screen replace
them, since a style sheet outside does not reach into a figure on paper.
"""

from __future__ import annotations

from collections.abc import Iterable
from html import escape

INK, QUIET, HAIR = "#20242a", "#59616c", "#c8ccd2"
CURVE, FORBIDDEN, ALLOWED, CLAIM, PAPER = "#23457a", "#a3123f", "#0b6b5c", "#8a5200", "#ffffff"
FONT = "DejaVu Sans"


def short(value: float) -> str:
    """Return a coordinate to a tenth of a pixel."""
    text = f"{value:.1f}"
    return text[:-2] if text.endswith(".0") else text


def tag(name: str, *inside: str, **attributes: object) -> str:
    """Return an element; `_` in attribute names stands for `-`, numbers are rounded, None is left out."""
    parts = []
    for key, value in attributes.items():
        if value is None:
            continue
        shown = short(value) if isinstance(value, float) else str(value)
        parts.append(f' {key.rstrip("_").replace("_", "-")}="{escape(shown)}"')
    opened = f"<{name}{''.join(parts)}"
    return f"{opened}>{''.join(inside)}</{name}>" if inside else f"{opened}/>"


def line(x1: float, y1: float, x2: float, y2: float, stroke: str = INK, width: float = 1.0, **more: object) -> str:
    """Return a straight line."""
    return tag(
        "line",
        x1=float(x1),
        y1=float(y1),
        x2=float(x2),
        y2=float(y2),
        stroke=stroke,
        stroke_width=width,
        class_=colour_class(stroke),
        **more,
    )


def text(
    x: float, y: float, content: str, size: float = 9, anchor: str = "start", fill: str = INK, **more: object
) -> str:
    """Return a piece of text with its baseline at y; `content` is escaped."""
    return tag(
        "text",
        escape(content),
        x=float(x),
        y=float(y),
        font_size=size,
        text_anchor=anchor,
        fill=fill,
        class_="f" + colour_class(fill)[1:],
        **more,
    )


def path(points: Iterable[tuple[float, float]], stroke: str, width: float, **more: object) -> str:
    """Return an open line through points, relative and rounded, repeated points dropped."""
    moves: list[str] = []
    last: tuple[int, int] | None = None
    for x, y in points:
        here = (round(x * 10), round(y * 10))
        if last is None:
            moves.append(f"M{short(here[0] / 10)} {short(here[1] / 10)}l")
        elif here != last:
            moves.append(f"{short((here[0] - last[0]) / 10)} {short((here[1] - last[1]) / 10)}")
        last = here
    return tag(
        "path",
        d=" ".join(moves),
        fill="none",
        stroke=stroke,
        stroke_width=width,
        stroke_linejoin="round",
        class_=colour_class(stroke),
        **more,
    )


def strokes(segments: Iterable[tuple[float, float, float, float]], stroke: str, width: float, **more: object) -> str:
    """Return straight lines, each from (x1, y1) to (x2, y2), as one element: many elements are slow to lay out."""
    moves = "".join(f"M{short(x1)} {short(y1)}L{short(x2)} {short(y2)}" for x1, y1, x2, y2 in segments)
    return tag("path", d=moves, fill="none", stroke=stroke, stroke_width=width, class_=colour_class(stroke), **more)


def rectangle(x: float, y: float, width: float, height: float, fill: str, **more: object) -> str:
    """Return a filled rectangle."""
    return tag("rect", x=float(x), y=float(y), width=float(width), height=float(height), fill=fill, **more)


def hatching(name: str, colour: str = FORBIDDEN) -> str:
    """Return the definition of the hatching of forbidden sides; use it as `fill="url(#name)"`."""
    lines = "M0 7L7 0M-1.75 1.75L1.75 -1.75M5.25 8.75L8.75 5.25"
    stroke = tag("path", d=lines, stroke=colour, stroke_width=0.6, class_=colour_class(colour))
    pattern = tag("pattern", stroke, id=name, width=7, height=7, patternUnits="userSpaceOnUse")
    return tag("defs", pattern)


def figure(width: float, height: float, title: str, *inside: str, **more: object) -> str:
    """Return a whole figure; `title` is read out in its place."""
    return tag(
        "svg",
        tag("title", escape(title)),
        *inside,
        xmlns="http://www.w3.org/2000/svg",
        viewBox=f"0 0 {short(width)} {short(height)}",
        width=short(width),
        height=short(height),
        role="img",
        font_family=FONT,
        **more,
    )


def colour_class(colour: str) -> str:
    """Return the class by which the screen recolours a stroke (`f…` with the same ending for a fill)."""
    return _CLASSES.get(colour, "s-ink")


_CLASSES = {
    INK: "s-ink",
    QUIET: "s-quiet",
    HAIR: "s-hair",
    CURVE: "s-curve",
    FORBIDDEN: "s-forbidden",
    ALLOWED: "s-allowed",
    CLAIM: "s-claim",
    PAPER: "s-paper",
}
