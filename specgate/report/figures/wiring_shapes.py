"""What a picture of wiring is made of, and the rule that nothing in it may lie on anything else."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import combinations, pairwise

from specgate.report.figures.wiring_graph import NotDrawable
from specgate.terms.records import record

CHARACTER = 4.85
"""Breadth of a character of the labels, pixels (DejaVu Sans Mono at 8)."""
Spot = tuple[float, float]
"""A place in pixels, to the right and down."""


@record
class Box:
    """A node in its place: middle, size, direction of flow (1 to the right, -1 to the left)."""

    node: int
    x: float
    y: float
    width: float
    height: float
    flow: int

    @property
    def exit(self) -> float:
        """The edge that the flow leaves by."""
        return self.x + self.flow * self.width / 2

    @property
    def entry(self) -> float:
        """The edge that the flow enters by."""
        return self.x - self.flow * self.width / 2


@record
class Run:
    """A line through corners, with an arrow at its end; `net` is the node and the port whose signal it carries.

    `tapped`: it begins on another line of its net, which a dot shows.
    """

    net: tuple[int, str]
    corners: tuple[Spot, ...]
    tapped: bool = False


@record
class Label:
    """A word beside a line."""

    x: float
    y: float
    words: str
    anchor: str = "start"

    @property
    def ends(self) -> tuple[float, float]:
        """Left and right end."""
        length = len(self.words) * CHARACTER
        left = self.x - {"start": 0.0, "middle": 0.5, "end": 1.0}[self.anchor] * length
        return left, left + length


@dataclass
class Layout:
    """A picture of wiring."""

    boxes: dict[int, Box] = field(default_factory=dict)
    runs: list[Run] = field(default_factory=list)
    labels: list[Label] = field(default_factory=list)

    def extent(self) -> tuple[float, float, float, float]:
        """Return left, top, right, bottom of everything."""
        spots = [(b.x + s * b.width / 2, b.y + s * b.height / 2) for b in self.boxes.values() for s in (-1, 1)]
        spots += [corner for run in self.runs for corner in run.corners]
        for label in self.labels:
            spots += [(label.ends[0], label.y - 7), (label.ends[1], label.y + 2)]
        xs, ys = [x for x, _ in spots], [y for _, y in spots]
        return min(xs), min(ys), max(xs), max(ys)

    def check(self) -> None:
        """Raise NotDrawable where blocks, lines of different signals, or words and blocks lie on one another."""
        boxes = list(self.boxes.values())
        if any(_apart(one, other) < 3 for one, other in combinations(boxes, 2)):
            raise NotDrawable("blocks on one another")
        segments = [(run.net, start, end) for run in self.runs for start, end in pairwise(run.corners)]
        if any(_crosses(box, start, end) for _, start, end in segments for box in boxes):
            raise NotDrawable("a line through a block")
        for (net, *one), (other_net, *other) in combinations(segments, 2):
            if net != other_net and _along(one, other):
                raise NotDrawable("lines of two signals on one another")
        if any(_covers(box, label) for label in self.labels for box in boxes):
            raise NotDrawable("a word on a block")


def _apart(one: Box, other: Box) -> float:
    across = abs(one.x - other.x) - (one.width + other.width) / 2
    along = abs(one.y - other.y) - (one.height + other.height) / 2
    return max(across, along)


def _crosses(box: Box, start: Spot, end: Spot) -> bool:
    """Tell whether an upright or level line passes through the inside of a box."""
    half_width, half_height = box.width / 2 - 1, box.height / 2 - 1
    low, high = sorted((start[0], end[0]))
    top, bottom = sorted((start[1], end[1]))
    across = low < box.x + half_width and high > box.x - half_width
    return across and top < box.y + half_height and bottom > box.y - half_height


def _along(one: list[Spot], other: list[Spot]) -> bool:
    """Tell whether two upright or two level lines share more than a point, or run so close that they seem to."""
    for axis in (0, 1):
        if all(abs(spot[axis] - one[0][axis]) < 2 for spot in (*one, *other)):
            (low, high), (bottom, top) = (sorted(spot[1 - axis] for spot in line) for line in (one, other))
            return min(high, top) - max(low, bottom) > 1
    return False


def _covers(box: Box, label: Label) -> bool:
    left, right = label.ends
    across = left < box.x + box.width / 2 and right > box.x - box.width / 2
    return across and label.y - 6 < box.y + box.height / 2 and label.y > box.y - box.height / 2


def two_lines(label: str) -> tuple[str, ...]:
    """Return a block's name in one line, or in two where it is long and has an underscore to break at."""
    breaks = [k for k, c in enumerate(label) if c == "_"]
    if len(label) <= 12 or not breaks:
        return (label,)
    at = min(breaks, key=lambda k: abs(k - len(label) / 2)) + 1
    return (label[:at], label[at:])


def signs(line_is_negative: bool, at: Spot, side: int) -> Iterator[Label]:
    """Yield the sign of a line at a sum: `side` is 0 where it enters along the flow, 1 from below, -1 from above."""
    x, y = at
    words = "−" if line_is_negative else "+"
    yield Label(x - 2, y + 11, words, "end") if side == 0 else Label(x + 5, y + (11 if side > 0 else -5), words)
