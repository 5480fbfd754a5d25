"""Where the blocks of a loop stand and how its lines run: the spine straight, returns below it, the rest above."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from specgate.report.figures.wiring_graph import Graph, Line, NotDrawable
from specgate.report.figures.wiring_paths import Branch, branches, parts, spine

CHARACTER = 4.85
"""Breadth of a character of the labels, pixels (DejaVu Sans Mono at 8)."""
BLOCK, SUM, GAP, ROW = 30.0, 18.0, 22.0, 46.0
WIDEST = 980.0
STRETCHES = (1.0, 1.35, 1.8, 2.4)


@dataclass(frozen=True)
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


@dataclass(frozen=True)
class Run:
    """A line through corners, with an arrow at its end."""

    corners: tuple[tuple[float, float], ...]
    tapped: bool = False


@dataclass(frozen=True)
class Label:
    """A word beside a line."""

    x: float
    y: float
    words: str
    anchor: str = "start"


@dataclass
class Layout:
    """A picture of wiring, in pixels."""

    boxes: dict[int, Box] = field(default_factory=dict)
    runs: list[Run] = field(default_factory=list)
    labels: list[Label] = field(default_factory=list)

    def extent(self) -> tuple[float, float, float, float]:
        """Return left, top, right, bottom of everything."""
        xs = [b.x + s * b.width / 2 for b in self.boxes.values() for s in (-1, 1)]
        ys = [b.y + s * b.height / 2 for b in self.boxes.values() for s in (-1, 1)]
        for run in self.runs:
            xs += [x for x, _ in run.corners]
            ys += [y for _, y in run.corners]
        for label in self.labels:
            ends = {"start": (0.0, 1.0), "end": (-1.0, 0.0), "middle": (-0.5, 0.5)}[label.anchor]
            xs += [label.x + share * len(label.words) * CHARACTER for share in ends]
            ys += [label.y - 7, label.y + 2]
        return min(xs), min(ys), max(xs), max(ys)


def layouts(graph: Graph, channels: Iterable[tuple[str, str]]) -> list[Layout]:
    """Return a picture for each group of nodes that hang together. Raises NotDrawable."""
    channels = list(channels)
    return [_stretched(graph, group, channels) for group in parts(graph)]


def _stretched(graph: Graph, group: list[int], channels: list[tuple[str, str]]) -> Layout:
    """Return the narrowest picture in which nothing lies on anything else."""
    through = spine(graph, group, channels)
    if not through:
        raise NotDrawable("no way through")
    problem = NotDrawable("too wide")
    for stretch in STRETCHES:
        try:
            picture = _Placer(graph, through, stretch).place(branches(graph, group, through))
        except NotDrawable as error:
            problem = error
            continue
        left, _, right, _ = picture.extent()
        if right - left <= WIDEST:
            return picture
    raise problem


class _Placer:
    """Places one group: first the spine, then each branch in the nearest free row."""

    def __init__(self, graph: Graph, through: list[Line], stretch: float) -> None:
        self.graph, self.through, self.stretch = graph, through, stretch
        self.picture = Layout()
        self.rows: dict[int, list[tuple[float, float]]] = {}
        self.taps: dict[int, int] = {}
        self.entries: dict[tuple[int, int], int] = {}
        self.straight = {line.source: line.output for line in through}
        last = through[-1].target
        self.straight[last] = next((port for _, port in graph.nodes[last].signals), "")

    def place(self, all_branches: list[Branch]) -> Layout:
        leaving: dict[int, int] = {}
        for branch in all_branches:
            if branch.start is not None:
                leaving[branch.start.source] = leaving.get(branch.start.source, 0) + 1
        self._spine(leaving)
        waiting = list(all_branches)
        while waiting:
            ready = [b for b in waiting if all(e is None or n in self.picture.boxes for e, n in _anchors(b))]
            branch = min(ready, key=lambda b: self._span(b))
            waiting.remove(branch)
            self._branch(branch)
        self._loose_signals()
        self._check()
        return self.picture

    # --- the spine ----------------------------------------------------------------------------------------------------

    def _spine(self, leaving: dict[int, int]) -> None:
        x = 0.0
        nodes = [self.through[0].source, *(line.target for line in self.through)]
        for node, line in zip(nodes, [*self.through, None], strict=True):
            width, height = self._size(node)
            box = self.picture.boxes[node] = Box(node, x + width / 2, 0.0, width, height, 1)
            words = self._signal(node, self.straight.get(node, ""))
            taps = 8.0 * leaving.get(node, 0)
            room = (taps + len(words) * CHARACTER + 14 if words else taps + 12) if line or words else 0.0
            gap = max(GAP, room) * self.stretch
            if words:
                self.picture.labels.append(Label(box.exit + 5 + taps, -4, words))
            if line is not None:
                self.picture.runs.append(Run(((box.exit, 0.0), (box.exit + gap, 0.0))))
                self._sign(line, box.exit + gap, 0.0, side=0)
            else:
                self.picture.runs.append(Run(((box.exit, 0.0), (box.exit + max(gap, 26.0), 0.0))))
            x = box.exit + gap

    def _size(self, node: int) -> tuple[float, float]:
        item = self.graph.nodes[node]
        if item.kind == "sum":
            return SUM, SUM
        if item.kind != "block":
            return len(item.label) * CHARACTER + (4 if item.kind == "input" else 12), 14.0
        return max(len(part) for part in two_lines(item.label)) * CHARACTER + 12, BLOCK

    def _signal(self, node: int, port: str) -> str:
        return ", ".join(name for name, given in self.graph.nodes[node].signals if given == port)

    # --- branches -----------------------------------------------------------------------------------------------------

    def _span(self, branch: Branch) -> tuple[float, float]:
        boxes = self.picture.boxes
        if branch.start is None or branch.end is None:
            return (0.0 if len(branch.nodes) == 1 else 1e6, 0.0)
        start, end = boxes[branch.start.source], boxes[branch.end.target]
        return (abs(start.x - end.x) + 100 * len(branch.nodes), start.x)

    def _branch(self, branch: Branch) -> None:
        boxes = self.picture.boxes
        level = [boxes[node].y for end, node in _anchors(branch) if end is not None]
        start = boxes[branch.start.source] if branch.start else None
        end = boxes[branch.end.target] if branch.end else None
        returns = start is not None and end is not None and start.exit > end.entry - GAP
        below = returns or any(y > 0 for y in level)
        side = 1 if below else -1
        out = self._tap(branch.start, side) if branch.start else None
        into = self._enter(branch.end, side) if branch.end else None
        flow = -1 if returns else 1
        spots = self._spots(branch.nodes, out, into, flow)
        edges = [x + s * w / 2 for x, w in spots for s in (-1, 1)] + [p[0] for p in (out, into) if p is not None]
        interval = (min(edges) - 10, max(edges) + (10 if into or not branch.nodes else 60))
        row = self._row(side, max(abs(round(y / ROW)) for y in level), interval)
        for node, (x, width) in zip(branch.nodes, spots, strict=True):
            boxes[node] = Box(node, x, row, width, self._size(node)[1], flow)
        self._connect(branch, out, into, row)

    def _spots(
        self, nodes: tuple[int, ...], out: tuple[float, float] | None, into: tuple[float, float] | None, flow: int
    ) -> list[tuple[float, float]]:
        """Return middle and breadth of each node of a branch, in the order of the flow."""
        widths = [self._size(node)[0] for node in nodes]
        if not nodes:
            return []
        words = [len(self._signal(node, self._port(node))) * CHARACTER for node in nodes]
        gaps = [max(GAP, w + 12) for w in words[:-1]]
        total = sum(widths) + sum(gaps)
        tail = max(14.0, words[-1] + 10)
        if out is not None and into is not None:
            free = abs(out[0] - into[0]) - total - tail - 12
            if free < 0:
                raise NotDrawable("a branch is longer than what it spans")
            first = out[0] + flow * (12 + free / 2)
        elif out is not None:
            first = out[0] + 16
        elif into is not None and len(nodes) == 1 and self.graph.nodes[nodes[0]].kind == "input":
            return [(into[0], widths[0])]
        else:
            first = (into[0] if into else 0.0) - tail - total
        spots = []
        for width, gap in zip(widths, [*gaps, 0.0], strict=True):
            spots.append((first + flow * width / 2, width))
            first += flow * (width + gap)
        return spots

    def _port(self, node: int) -> str:
        return next((port for _, port in self.graph.nodes[node].signals), "")

    def _tap(self, line: Line, side: int) -> tuple[float, float]:
        """Return where a branch leaves the line behind a node, or the node's edge for a port of its own."""
        box = self.picture.boxes[line.source]
        if line.output != self.straight.get(line.source, self._port(line.source)):
            return box.x + box.flow * box.width / 4, box.y + side * box.height / 2
        count = self.taps[line.source] = self.taps.get(line.source, 0) + 1
        return box.exit + box.flow * 8.0 * count, box.y

    def _enter(self, line: Line, side: int) -> tuple[float, float]:
        box = self.picture.boxes[line.target]
        key = (line.target, side)
        count = self.entries[key] = self.entries.get(key, -1) + 1
        shift = (0.0, 12.0, -12.0)[min(count, 2)] if box.width > SUM else (0.0, 5.0, -5.0)[min(count, 2)]
        if count > 2:
            raise NotDrawable("many lines into one node")
        return box.x + shift, box.y + side * box.height / 2

    def _row(self, side: int, beyond: int, interval: tuple[float, float]) -> float:
        for number in range(beyond + 1, beyond + 12):
            taken = self.rows.setdefault(side * number, [])
            if all(interval[1] < low or high < interval[0] for low, high in taken):
                taken.append(interval)
                return side * number * ROW
        raise NotDrawable("too many branches")

    def _connect(
        self, branch: Branch, out: tuple[float, float] | None, into: tuple[float, float] | None, row: float
    ) -> None:
        boxes = [self.picture.boxes[node] for node in branch.nodes]
        runs = self.picture.runs
        lead = [out, (out[0], row)] if out else []
        tapped = out is not None and out[1] == self.picture.boxes[branch.start.source].y if branch.start else False
        for before, after in zip([None, *boxes], [*boxes, None], strict=True):
            head = lead if before is None else [(before.exit, row)]
            if after is not None:
                if head:
                    runs.append(Run((*head, (after.entry, row)), tapped and before is None))
            elif into is not None:
                drop = before is not None and abs(before.x - into[0]) < 1
                corners = (
                    ((into[0], row + (7 if row < into[1] else -7)), into) if drop else (*head, (into[0], row), into)
                )
                runs.append(Run(corners, tapped and before is None))
                if branch.end is not None:
                    self._sign(branch.end, *into, side=1 if row > into[1] else -1)
            elif before is not None:
                runs.append(Run(((before.exit, row), (before.exit + before.flow * 26, row))))
        for box in boxes:
            words = self._signal(box.node, self._port(box.node))
            if words:
                self.picture.labels.append(
                    Label(box.exit + box.flow * 5, row - 4, words, "start" if box.flow > 0 else "end")
                )
        if branch.start is not None and not tapped and out is not None:
            words = self._signal(branch.start.source, branch.start.output)
            self.picture.labels.append(Label(out[0] + 4, out[1] + (12 if row > out[1] else -5), words))

    def _sign(self, line: Line, x: float, y: float, side: int) -> None:
        """Write the sign of a line into a sum, or the port of a line that enters a block from above or below."""
        if self.graph.nodes[line.target].kind == "sum":
            sign = "−" if line.negative else "+"
            spot = (x - 2, y + 11, "end") if side == 0 else (x + 5, y + (11 if side > 0 else -5), "start")
            self.picture.labels.append(Label(spot[0], spot[1], sign, spot[2]))
        elif line.input and side and line.input != self.graph.nodes[line.source].label:
            self.picture.labels.append(Label(x + 5, y + (10 if side > 0 else -4), line.input))

    def _loose_signals(self) -> None:
        """Draw out the signals that nothing reads, unless they end the spine."""
        read = {(line.source, line.output) for line in self.graph.lines}
        for node, box in list(self.picture.boxes.items()):
            for port in dict.fromkeys(port for _, port in self.graph.nodes[node].signals):
                if (node, port) in read or port == self.straight.get(node, self._port(node)):
                    continue
                x, y = box.x + box.flow * box.width / 4, box.y - box.height / 2
                self.picture.runs.append(Run(((x, y), (x, y - 16))))
                self.picture.labels.append(Label(x + 4, y - 9, self._signal(node, port)))

    # --- nothing may lie on anything else -----------------------------------------------------------------------------

    def _check(self) -> None:
        boxes = list(self.picture.boxes.values())
        for k, one in enumerate(boxes):
            for other in boxes[k + 1 :]:
                if _apart(one, other) < 3:
                    raise NotDrawable("blocks on one another")
        for run in self.picture.runs:
            for start, end in zip(run.corners, run.corners[1:], strict=False):
                if any(_crosses(box, start, end) for box in boxes):
                    raise NotDrawable("a line through a block")


def _anchors(branch: Branch) -> tuple[tuple[Line | None, int], ...]:
    start = (branch.start, branch.start.source if branch.start else -1)
    return (start, (branch.end, branch.end.target if branch.end else -1))


def _apart(one: Box, other: Box) -> float:
    across = abs(one.x - other.x) - (one.width + other.width) / 2
    along = abs(one.y - other.y) - (one.height + other.height) / 2
    return max(across, along)


def _crosses(box: Box, start: tuple[float, float], end: tuple[float, float]) -> bool:
    """Tell whether an upright or level line passes through the inside of a box."""
    half_width, half_height = box.width / 2 - 1, box.height / 2 - 1
    low, high = sorted((start[0], end[0]))
    top, bottom = sorted((start[1], end[1]))
    across = low < box.x + half_width and high > box.x - half_width
    return across and top < box.y + half_height and bottom > box.y - half_height


def two_lines(label: str) -> tuple[str, ...]:
    """Return a block's name in one line, or in two where it is long and has an underscore to break at."""
    if len(label) <= 12 or "_" not in label:
        return (label,)
    breaks = [k for k, c in enumerate(label) if c == "_"]
    at = min(breaks, key=lambda k: abs(k - len(label) / 2)) + 1
    return (label[:at], label[at:])
