"""Where the blocks of a loop stand and how its lines run: the spine straight, returns below it, the rest above."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

from specgate.report.figures.wiring_graph import Graph, Line, NotDrawable
from specgate.report.figures.wiring_paths import Branch, branches, parts, spine
from specgate.report.figures.wiring_shapes import CHARACTER, Box, Label, Layout, Run, Spot, signs, two_lines
from specgate.terms.records import record

BLOCK, SUM, GAP, ROW, TAP, OUT = 30.0, 18.0, 22.0, 46.0, 8.0, 26.0
"""Height of a block, breadth of a sum, least gaps between nodes, rows and taps, length of a line that leads out."""
WIDEST = 980.0
STRETCHES = (1.0, 1.35, 1.8, 2.4)


@record
class Route:
    """A branch in its place: where it leaves, where it arrives, the height of its row, where its nodes stand."""

    branch: Branch
    out: Spot | None
    into: Spot | None
    row: float
    boxes: tuple[Box, ...]


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
            picture.check()
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
        self.rows: dict[int, list[Spot]] = {}
        self.taps: Counter[int] = Counter()
        self.entries: Counter[tuple[int, int]] = Counter()
        self.straight = {line.source: line.output for line in through}

    def place(self, waiting: list[Branch]) -> Layout:
        """Return the picture; of the branches whose ends are placed, the shortest goes first and lies innermost."""
        self._spine(Counter(branch.start.source for branch in waiting if branch.start))
        while waiting:
            ready = [branch for branch in waiting if all(node in self.picture.boxes for node in _anchors(branch))]
            branch = min(ready, key=self._span)
            waiting.remove(branch)
            self._draw(self._route(branch))
        self._loose_signals()
        return self.picture

    # --- nodes and their signals ------------------------------------------------------------------------------------

    def _size(self, node: int) -> tuple[float, float]:
        item = self.graph.nodes[node]
        if item.kind == "sum":
            return SUM, SUM
        if item.kind != "block":
            return len(item.label) * CHARACTER + (4 if item.kind == "input" else 12), 14.0
        return max(len(part) for part in two_lines(item.label)) * CHARACTER + 12, BLOCK

    def _port(self, node: int) -> str:
        """Return the port whose signal runs straight on from a node: that of the spine, else its first."""
        first = next((port for _, port in self.graph.nodes[node].signals), "")
        return self.straight.get(node, first)

    def _words(self, node: int, port: str) -> str:
        return ", ".join(name for name, given in self.graph.nodes[node].signals if given == port)

    # --- the spine --------------------------------------------------------------------------------------------------

    def _spine(self, leaving: Counter[int]) -> None:
        x = 0.0
        nodes = [self.through[0].source, *(line.target for line in self.through)]
        for node, line in zip(nodes, [*self.through, None], strict=True):
            width, height = self._size(node)
            box = self.picture.boxes[node] = Box(node, x + width / 2, 0.0, width, height, 1)
            words = self._words(node, self._port(node))
            taps = TAP * leaving[node]
            gap = max(GAP if line else OUT, taps + (len(words) * CHARACTER + 14 if words else 12)) * self.stretch
            x = box.exit + gap
            self.picture.runs.append(Run((node, self._port(node)), ((box.exit, 0.0), (x, 0.0))))
            if words:
                self.picture.labels.append(Label(box.exit + 5 + taps, -4, words))
            if line is not None:
                self._mark_entry(line, (x, 0.0), 0)

    # --- a branch finds its place -----------------------------------------------------------------------------------

    def _span(self, branch: Branch) -> tuple[float, float]:
        boxes = self.picture.boxes
        if branch.start is None or branch.end is None:
            return (0.0 if len(branch.nodes) == 1 else 1e6, 0.0)
        start, end = boxes[branch.start.source], boxes[branch.end.target]
        return (abs(start.x - end.x) + 100 * len(branch.nodes), start.x)

    def _route(self, branch: Branch) -> Route:
        boxes = self.picture.boxes
        levels = [boxes[node].y for node in _anchors(branch)]
        start = boxes[branch.start.source] if branch.start else None
        end = boxes[branch.end.target] if branch.end else None
        returns = start is not None and end is not None and start.exit > end.entry - GAP
        side = 1 if returns or any(y > 0 for y in levels) else -1
        flow = -1 if returns else 1
        out = self._tap(branch.start, side) if branch.start else None
        into = self._enter(branch.end, side) if branch.end else None
        spots = self._spots(branch.nodes, out, into, flow)
        edges = [x + s * w / 2 for x, w in spots for s in (-1, 1)] + [spot[0] for spot in (out, into) if spot]
        reach = (min(edges) - 10, max(edges) + (10 if into or not branch.nodes else 60))
        row = self._row(side, max(abs(round(y / ROW)) for y in levels), reach)
        placed = tuple(
            Box(node, x, row, width, self._size(node)[1], flow)
            for node, (x, width) in zip(branch.nodes, spots, strict=True)
        )
        boxes.update((box.node, box) for box in placed)
        return Route(branch, out, into, row, placed)

    def _tap(self, line: Line, side: int) -> Spot:
        """Return where a branch leaves the line behind a node, or the node's edge for a port of its own."""
        box = self.picture.boxes[line.source]
        if line.output != self._port(line.source):
            return box.x + box.flow * box.width / 4, box.y + side * box.height / 2
        self.taps[line.source] += 1
        return box.exit + box.flow * TAP * self.taps[line.source], box.y

    def _enter(self, line: Line, side: int) -> Spot:
        """Return where a branch arrives at a node from below or above; a second and a third one beside the first."""
        box = self.picture.boxes[line.target]
        count = self.entries[line.target, side]
        self.entries[line.target, side] += 1
        if count > 2:
            raise NotDrawable("many lines into one node")
        shift = (0, 1, -1)[count] * (12.0 if box.width > SUM else 5.0)
        return box.x + shift, box.y + side * box.height / 2

    def _spots(self, nodes: tuple[int, ...], out: Spot | None, into: Spot | None, flow: int) -> list[Spot]:
        """Return middle and breadth of each node of a branch, in the order of the flow."""
        if not nodes:
            return []
        widths = [self._size(node)[0] for node in nodes]
        if out is None and into is not None and len(nodes) == 1 and self.graph.nodes[nodes[0]].kind == "input":
            return [(into[0], widths[0])]
        words = [len(self._words(node, self._port(node))) * CHARACTER for node in nodes]
        gaps = [max(GAP, breadth + 12) for breadth in words[:-1]]
        length = sum(widths) + sum(gaps) + max(14.0, words[-1] + 10)
        x = self._first(length, out, into, flow)
        spots = []
        for width, gap in zip(widths, [*gaps, 0.0], strict=True):
            spots.append((x + flow * width / 2, width))
            x += flow * (width + gap)
        return spots

    def _first(self, length: float, out: Spot | None, into: Spot | None, flow: int) -> float:
        """Return where a chain of nodes begins: in the middle of what it spans, or right before or after its end."""
        if out is None:
            return (into[0] if into else 0.0) - length
        if into is None:
            return out[0] + 16
        free = abs(out[0] - into[0]) - length - 12
        if free < 0:
            raise NotDrawable("a branch is longer than what it spans")
        return out[0] + flow * (12 + free / 2)

    def _row(self, side: int, beyond: int, reach: Spot) -> float:
        for number in range(beyond + 1, beyond + 12):
            taken = self.rows.setdefault(side * number, [])
            if all(reach[1] < low or high < reach[0] for low, high in taken):
                taken.append(reach)
                return side * number * ROW
        raise NotDrawable("too many branches")

    # --- a branch is drawn ------------------------------------------------------------------------------------------

    def _draw(self, route: Route) -> None:
        branch, row, boxes = route.branch, route.row, route.boxes
        runs = self.picture.runs
        tapped = False
        corners: tuple[Spot, ...] = ()
        net = (-1, "")
        if branch.start is not None and route.out is not None:
            net = (branch.start.source, branch.start.output)
            corners = (route.out, (route.out[0], row))
            tapped = branch.start.output == self._port(branch.start.source)
            if not tapped:
                below = 12 if row > route.out[1] else -5
                self.picture.labels.append(Label(route.out[0] + 4, route.out[1] + below, self._words(*net)))
        for box in boxes:
            if corners:
                runs.append(Run(net, (*corners, (box.entry, row)), tapped))
            net, corners, tapped = (box.node, self._port(box.node)), ((box.exit, row),), False
            words = self._words(*net)
            if words:
                anchor = "start" if box.flow > 0 else "end"
                self.picture.labels.append(Label(box.exit + box.flow * 5, row - 4, words, anchor))
        if branch.end is None:
            runs.append(Run(net, (*corners, (boxes[-1].exit + boxes[-1].flow * OUT, row))))
        elif route.into is not None:
            runs.append(Run(net, self._arrival(route, corners), tapped))
            self._mark_entry(branch.end, route.into, 1 if row > route.into[1] else -1)

    def _arrival(self, route: Route, corners: tuple[Spot, ...]) -> tuple[Spot, ...]:
        """Return the last line of a branch: around a corner, or straight down from an input right above its end."""
        if route.into is None:
            return corners
        if len(route.boxes) == 1 and abs(route.boxes[0].x - route.into[0]) < 1:
            return ((route.into[0], route.row + (7 if route.row < route.into[1] else -7)), route.into)
        return (*corners, (route.into[0], route.row), route.into)

    def _mark_entry(self, line: Line, at: Spot, side: int) -> None:
        """Write the sign of a line into a sum, or the port of a line that enters a block from above or below."""
        if self.graph.nodes[line.target].kind == "sum":
            self.picture.labels += signs(line.negative, at, side)
        elif line.input and side and line.input != self.graph.nodes[line.source].label:
            self.picture.labels.append(Label(at[0] + 5, at[1] + (10 if side > 0 else -4), line.input))

    def _loose_signals(self) -> None:
        """Draw out the signals that nothing reads, unless they run straight on."""
        read = {(line.source, line.output) for line in self.graph.lines}
        for node, box in self.picture.boxes.items():
            for port in dict.fromkeys(port for _, port in self.graph.nodes[node].signals):
                if (node, port) not in read and port != self._port(node):
                    x, y = box.x + box.flow * box.width / 4, box.y - box.height / 2
                    self.picture.runs.append(Run((node, port), ((x, y), (x, y - 16))))
                    self.picture.labels.append(Label(x + 4, y - 9, self._words(node, port)))


def _anchors(branch: Branch) -> list[int]:
    """Return the nodes that a branch hangs on."""
    start = [branch.start.source] if branch.start else []
    return start + ([branch.end.target] if branch.end else [])
