"""The view model: every requirement once, every link to a place that exists, the worst first."""

from __future__ import annotations

from dataclasses import fields, is_dataclass, replace
from types import ModuleType
from typing import Any

from specgate.report import anchors
from specgate.report.figures.step import StepFigure
from specgate.report.page import short
from specgate.report.parts import front, matrix, trace
from specgate.report.pdf import destinations
from specgate.report.view import View, view
from specgate.review.types import Review


def texts(tree: Any) -> list[str]:
    """Every text in a tree of dataclasses."""
    if isinstance(tree, str):
        return [tree]
    if isinstance(tree, dict):
        return [text for item in tree.items() for text in texts(item)]
    if isinstance(tree, tuple):
        return [text for item in tree for text in texts(item)]
    if is_dataclass(tree):
        return [text for field in fields(tree) for text in texts(getattr(tree, field.name))]
    return []


def chain(sample: ModuleType, names: list[str], parents: dict[str, tuple[str, ...]]) -> Review:
    """The sample with other requirements, each derived from the given parents."""
    plain = sample.review().requirements["BD-SUB-40"]
    requirements = {name: replace(plain, derived_from=parents.get(name, ())) for name in names}
    return replace(sample.review(), requirements=requirements, trace={n: parents.get(n, ()) for n in names})


def test_every_requirement_has_one_row(sample: ModuleType) -> None:
    seen = [row.id for group in view(sample.review()).groups for row in group.rows]
    assert sorted(seen) == sorted(sample.review().requirements)


def test_rows_stand_under_their_parent(sample: ModuleType) -> None:
    groups = {
        group.parent.id if group.parent else None: [row.id for row in group.rows]
        for group in view(sample.review()).groups
    }
    assert groups == {
        None: ["BD-NEED-1", "BD-NEED-2", "BD-SUB-40"],
        "BD-NEED-1": ["BD-SYS-11", "BD-SYS-12", "BD-SYS-13", "BD-SYS-19"],
        "BD-NEED-2": ["BD-SYS-14", "BD-SYS-15"],
        "BD-SYS-12": ["BD-SUB-31"],
    }


def test_a_link_to_nothing_is_not_a_parent(sample: ModuleType) -> None:
    review = chain(sample, ["A", "B"], {"B": ("GONE", "A"), "A": ("A",)})
    groups = view(review).groups
    assert [(g.parent.id if g.parent else None, [r.id for r in g.rows]) for g in groups] == [
        (None, ["A"]),
        ("A", ["B"]),
    ]


def test_every_place_that_is_linked_exists(sample: ModuleType) -> None:
    seen: View = view(sample.review())
    places = destinations(seen)
    linked = [hold.anchor for hold in seen.front.holds]
    linked += [line.evidence for group in seen.groups for row in group.rows for line in row.lines]
    linked += [point.anchor for point in seen.open_points] + [finding.anchor for finding in seen.findings]
    assert [place for place in linked if place is not None and place not in places] == []


def test_claims_out_of_range_come_first(sample: ModuleType) -> None:
    assert [audit.standing.key for audit in view(sample.review()).audits] == [
        "out_of_range",
        "out_of_range",
        "inconclusive",
        "sound",
    ]


def test_what_holds_the_gate_is_said_once_per_requirement_with_its_number(sample: ModuleType) -> None:
    holds = {hold.requirement: hold for hold in front.front(sample.review()).holds}
    assert [state.key for state in holds["BD-SYS-11"].states] == ["non_compliant", "out_of_range"]
    assert holds["BD-SYS-11"].words == (
        "Settling time 5.037 s, allowed at most 1 s; formula 0.8 s, true 5.037 s: −84 % on the unsafe side"
    )
    assert holds["BD-SYS-13"].words == "the response has no final value: 2 poles at the origin"
    assert [state.key for state in holds["BD-SYS-14"].states] == ["open"]
    assert list(holds)[-2:] == ["BD-NEED-1", "BD-NEED-2"]
    assert front.sentence(sample.review()) == "It is held by 6 requirements and 2 other errors."


def test_counts(sample: ModuleType) -> None:
    page = front.front(sample.review())
    assert {count.status.key: count.number for count in (*page.verdicts, *page.standings)} == {
        "non_compliant": 3,
        "open": 3,
        "compliant": 3,
        "not_applicable": 1,
        "out_of_range": 2,
        "inconclusive": 1,
        "sound": 3,
    }


def test_a_passing_gate_says_so(sample: ModuleType) -> None:
    review = sample.review()
    passing = replace(review, gate=replace(review.gate, outcome="pass", reasons=()))
    assert (
        front.sentence(passing)
        == "Nothing that the project's policy names holds the gate: 9 requirements judged, 1 not applicable."
    )


def test_the_figure_of_a_settling_time(sample: ModuleType) -> None:
    audit = view(sample.review()).audits[0]
    figure = audit.picture
    assert isinstance(figure, StepFigure)
    (edge,) = figure.edges
    assert (edge.axis, edge.at, edge.forbidden) == ("time", 1.0, "above")
    assert edge.outside == (392.0, 408.0)
    (cross,) = figure.crosses
    assert cross.low <= cross.time <= cross.high
    assert abs(cross.value - 392.0) < 0.1
    assert [ring.time for ring in figure.rings] == [0.8]


def test_a_formula_without_a_value_is_why_there_is_no_error(sample: ModuleType) -> None:
    review = sample.review()
    name = view(review).audits[0].requirement
    first, *others = review.requirements[name].criteria
    without = replace(first, basis=replace(first.basis, formula=None, error=None))
    changed = replace(review.requirements[name], criteria=(without, *others))
    audits = view(replace(review, requirements={**review.requirements, name: changed})).audits
    (audit,) = [one for one in audits if one.requirement == name]
    assert audit.error == "not defined: the formula has no value on this loop"


def test_a_peak_deviation_is_forbidden_on_both_sides(sample: ModuleType) -> None:
    sheet = view(sample.review()).loops[0]
    figure = next(response.figure for response in sheet.responses if response.name == "reject")
    assert figure is not None
    assert [(edge.at, edge.forbidden) for edge in figure.edges] == [(3.0, "above"), (-3.0, "below")]


def test_the_trace_unfolds_a_requirement_once(sample: ModuleType) -> None:
    lines = [(line.level, line.id, line.repeated) for line in view(sample.review()).trace]
    assert (1, "BD-SYS-15", False) in lines
    assert (1, "BD-SYS-15", True) in lines
    assert (2, "BD-SUB-31", False) in lines


def test_circles_and_long_chains_are_traced(sample: ModuleType) -> None:
    circle = chain(sample, ["A", "B", "C"], {"A": ("C",), "B": ("A",), "C": ("B",)})
    assert {line.id for line in trace.lines(circle)} == {"A", "B", "C"}
    names = [f"R{k}" for k in range(3000)]
    long = chain(sample, names, {name: (names[k - 1],) for k, name in enumerate(names) if k})
    assert [line.id for line in trace.lines(long)] == names


def test_the_printed_matrix_keeps_what_needs_attention(sample: ModuleType) -> None:
    groups = view(sample.review()).groups
    kept, left_out = matrix.printed(groups, at_most=7)
    assert left_out == 3
    rows = [row for group in kept for row in group.rows]
    assert {row.id for row in rows if row.verdict.key in ("non_compliant", "open")} == {
        "BD-NEED-1",
        "BD-NEED-2",
        "BD-SYS-11",
        "BD-SYS-13",
        "BD-SYS-14",
        "BD-SUB-40",
    }
    assert matrix.printed(groups, at_most=10) == (groups, 0)


def test_no_character_acts(sample: ModuleType) -> None:
    review = sample.review()
    acting = replace(review, project=replace(review.project, title="a\x1bb\u202ec\u200bd\ud800e"))
    assert view(acting).front.title.title == "a[U+001B]b[U+202E]c[U+200B]d[U+D800]e"


def test_characters_without_a_glyph_are_named(sample: ModuleType) -> None:
    review = sample.review()
    strange = replace(review, project=replace(review.project, title="漢 α"))
    assert view(strange, shown=lambda c: c != "漢").front.title.title == "[U+6F22] α"
    assert "漢" not in "".join(texts(view(strange, shown=lambda c: c != "漢")))


def test_anchors_never_meet() -> None:
    names = ["A-1", "A_1", "A.1", "A 1", "A/1", "Ä1", "A~2e~1"]
    assert len({anchors.row(name) for name in names}) == len(names)
    assert all(" " not in anchors.row(name) for name in names)


def test_texts_are_cut_at_words() -> None:
    assert short("short", 10) == "short"
    assert short("one two three four", 12) == "one two…"
    assert short("x" * 30, 10) == "x" * 9 + "…"


def test_page_one_names_the_thresholds_that_were_loosened_and_no_others(sample: ModuleType) -> None:
    whole = sample.review()
    assert front.front(whole).loosened == ()
    looser = {
        "approximation": "dominant_pair",
        "condition": "separation",
        "catalogue": "5",
        "project": "3",
        "change": "looser",
    }
    policy = replace(whole.policy, changed_thresholds=(*whole.policy.changed_thresholds, looser))
    (words,) = front.front(replace(whole, policy=policy)).loosened
    assert words.endswith("separation: 3 in place of 5")
