"""Pictures of wiring: taken apart from the equations, and drawn only where nothing lies on anything else."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from itertools import combinations, pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.report.figures import wiring
from specgate.report.figures.wiring_graph import Graph, NotDrawable, graph
from specgate.report.figures.wiring_layout import layouts
from specgate.report.figures.wiring_paths import branches, parts, spine
from specgate.report.figures.wiring_shapes import Box, Label, Layout, Run


def into(of: Graph, label: str) -> list[tuple[str, bool, str]]:
    """The lines into a node: label of the source, whether subtracted, port."""
    at = next(k for k, node in enumerate(of.nodes) if node.label == label)
    return [(of.nodes[line.source].label or "sum", line.negative, line.input) for line in of.lines if line.target == at]


def sums(of: Graph) -> list[list[tuple[str, bool]]]:
    return [
        [(of.nodes[line.source].label, line.negative) for line in of.lines if line.target == k]
        for k, node in enumerate(of.nodes)
        if node.kind == "sum"
    ]


def test_sums_blocks_and_signals() -> None:
    wired = graph(("demand", "leak"), {"flow": "pump(demand - gauge(level)) - leak", "level": "tank(flow)"})
    assert sums(wired) == [[("demand", False), ("gauge", True)], [("pump", False), ("leak", True)]]
    assert into(wired, "tank") == [("sum", False, "")]
    assert wired.nodes[wired.signals["level"]].label == "tank"
    assert wired.nodes[wired.signals["level"]].signals == [("level", "")]


def test_a_block_with_the_same_arguments_is_drawn_once() -> None:
    wired = graph(
        ("duty", "load"), {"inner": "vessel(duty=duty, load=load).inner", "outer": "vessel(duty=duty, load=load).outer"}
    )
    assert [node.label for node in wired.nodes].count("vessel") == 1
    assert wired.nodes[wired.signals["inner"]].signals == [("inner", "inner"), ("outer", "outer")]
    assert into(wired, "vessel") == [("duty", False, "duty"), ("load", False, "load")]


@pytest.mark.parametrize(
    ("equation", "gains"),
    [
        ("2 * a + b", ["2"]),
        ("0.5 V/m * a", ["0.5 V/m"]),
        ("a / 4", ["1/4"]),
        ("(k + 1) * a", ["(k+1)"]),
        ("-a", ["−1"]),
        ("-3 * a", ["−3"]),
        ("a - -b", []),
        ("1e-3 * a", ["1e-3"]),
    ],
)
def test_constants_become_gains(equation: str, gains: list[str]) -> None:
    wired = graph(("a", "b"), {"y": f"block({equation})"})
    assert [node.label for node in wired.nodes if node.kind == "gain"] == gains


def test_a_signal_that_stands_for_another_is_no_node() -> None:
    wired = graph(("a",), {"x": "y", "y": "block(a)"})
    assert wired.signals["x"] == wired.signals["y"]
    assert sorted(wired.nodes[wired.signals["x"]].signals) == [("x", ""), ("y", "")]


@pytest.mark.parametrize(
    "equation",
    [
        "",
        "block(a",
        "block(a))",
        "a * a",
        "a ** 2",
        "block()",
        "a + 3",
        "x",
        "a b c d(",
        "a @ b",
        "(" * 60 + "a" + ")" * 60,
    ],
)
def test_what_is_not_understood_is_not_drawn(equation: str) -> None:
    assert wiring.draw(wiring.WiringFigure("w", "w", ("a", "b"), {"x": equation}, ())) == ""


LOOPS: list[tuple[tuple[str, ...], Mapping[str, str], tuple[tuple[str, str], ...]]] = [
    (("d", "w"), {"u": "c(d - m)", "v": "act(u) + w", "y": "plant(v)", "m": "probe(y)"}, (("d", "y"), ("w", "y"))),
    (("d",), {"u": "c(d - y)", "y": "plant(u)"}, (("d", "y"),)),
    (("d", "w"), {"u": "c(d - m) + ff(w)", "y": "plant(u - loss(y))", "m": "probe(y)"}, (("d", "y"),)),
    (
        ("d", "w"),
        {
            "a": "outer(demand=d, seen=z).a",
            "b": "inner(a - x)",
            "x": "body(b=b, w=w).x",
            "z": "body(b=b, w=w).z",
            "watched": "shown(z)",
        },
        (("d", "z"),),
    ),
    (("p", "q"), {"r": "one(p)", "s": "two(q)"}, (("p", "r"), ("q", "s"))),
    (("d",), {"y": "f(d) + g(d) - h(d)"}, (("d", "y"),)),
]


@pytest.mark.parametrize("number", range(len(LOOPS)))
def test_usual_loops_are_drawn(number: int) -> None:
    inputs, equations, channels = LOOPS[number]
    drawn = wiring.draw(wiring.WiringFigure("w", "Wiring", inputs, equations, channels))
    wired = graph(inputs, equations)
    words = re.findall(r"<text[^>]*>([^<]*)</text>", drawn)
    for node in wired.nodes:
        if node.kind == "block":
            assert node.label in words or "_" in node.label
    for name in (*inputs, *equations):
        assert any(name in word for word in words)
    assert drawn.count("<circle") >= sum(node.kind == "sum" for node in wired.nodes)


def test_the_spine_runs_from_the_first_response_through() -> None:
    inputs, equations, channels = LOOPS[0]
    wired = graph(inputs, equations)
    through = spine(wired, parts(wired)[0], channels)
    names = [wired.nodes[through[0].source].label, *(wired.nodes[line.target].label for line in through)]
    assert names == ["d", "", "c", "act", "", "plant"]


def test_every_line_is_drawn_once() -> None:
    for inputs, equations, channels in LOOPS:
        wired = graph(inputs, equations)
        drawn = 0
        for group in parts(wired):
            through = spine(wired, group, channels)
            drawn += len(through)
            for branch in branches(wired, group, through):
                ends = {id(line) for line in (branch.start, branch.end) if line is not None}
                drawn += len(ends) + max(0, len(branch.nodes) - 1)
        assert drawn == len(wired.lines)


names = st.sampled_from(["a", "b", "s0", "s1", "s2", "s3"])
terms = st.tuples(st.sampled_from(["{}", "f({})", "g(h({}))", "0.5 * {}", "k(x={0}, y={1}).z"]), names, names)
equations = st.lists(st.tuples(st.sampled_from([" + ", " - "]), terms), min_size=1, max_size=3).map(
    lambda parts: "".join(sign + shape.format(one, two) for sign, (shape, one, two) in parts).removeprefix(" + ")
)


@settings(max_examples=150, deadline=None)
@given(st.lists(equations, min_size=4, max_size=4))
def test_any_wiring_is_drawn_clean_or_not_at_all(lines: list[str]) -> None:
    equations = {f"s{k}": line for k, line in enumerate(lines)}
    channels = [("a", "s3"), ("b", "s0")]
    try:
        pictures = layouts(graph(("a", "b"), equations), channels)
    except NotDrawable:
        return
    for picture in pictures:
        boxes = list(picture.boxes.values())
        for one, other in combinations(boxes, 2):
            apart_x = abs(one.x - other.x) >= (one.width + other.width) / 2
            apart_y = abs(one.y - other.y) >= (one.height + other.height) / 2
            assert apart_x or apart_y
        for run in picture.runs:
            for (x0, y0), (x1, y1) in pairwise(run.corners):
                assert abs(x0 - x1) < 0.01 or abs(y0 - y1) < 0.01


def arrivals(picture: Layout) -> Counter[tuple[tuple[int, str], int]]:
    """Which signals arrive at which nodes, as drawn: the ends of lines that touch a box."""
    found: Counter[tuple[tuple[int, str], int]] = Counter()
    for run in picture.runs:
        x, y = run.corners[-1]
        for box in picture.boxes.values():
            beside = abs(abs(x - box.x) - box.width / 2) < 0.01 and abs(y - box.y) <= box.height / 2
            above = abs(abs(y - box.y) - box.height / 2) < 0.01 and abs(x - box.x) <= box.width / 2
            if beside or above:
                found[run.net, box.node] += 1
    return found


@pytest.mark.parametrize("number", range(len(LOOPS)))
def test_the_picture_says_what_the_equations_say(number: int) -> None:
    inputs, equations, channels = LOOPS[number]
    wired = graph(inputs, equations)
    drawn: Counter[tuple[tuple[int, str], int]] = Counter()
    for picture in layouts(wired, channels):
        drawn += arrivals(picture)
    assert drawn == Counter(((line.source, line.output), line.target) for line in wired.lines)


def test_lines_of_two_signals_never_lie_on_one_another() -> None:
    box = Box(0, 0.0, 0.0, 10.0, 10.0, 1)
    first, second = Run((0, ""), ((20.0, 0.0), (60.0, 0.0))), Run((1, ""), ((40.0, 1.0), (90.0, 1.0)))
    Layout({0: box}, [first, Run((0, ""), second.corners)]).check()
    with pytest.raises(NotDrawable, match="on one another"):
        Layout({0: box}, [first, second]).check()
    with pytest.raises(NotDrawable, match="through a block"):
        Layout({0: box}, [Run((1, ""), ((-20.0, 0.0), (20.0, 0.0)))]).check()
    with pytest.raises(NotDrawable, match="a word on a block"):
        Layout({0: box}, [], [Label(-2.0, 3.0, "word")]).check()
