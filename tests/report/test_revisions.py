"""Differences as a page and on paper: both responses in one plot, words marked, nothing loaded, nothing run."""

from __future__ import annotations

import io
import re
from dataclasses import replace
from html import unescape
from types import ModuleType

import pikepdf
import pytest

from specgate.report.revisions import page, paper, terminal
from specgate.report.revisions.marks import marked
from specgate.review.types import Curve, Review, ToolReview
from specgate.revisions.compare import differences
from specgate.revisions.types import Differences

HOSTILE = "</style><script>alert(1)</script><img src=x onerror=alert(1)>"


@pytest.fixture
def found(sample: ModuleType) -> Differences:
    """Differences with a reworded text, a fallen verdict and a response that runs otherwise."""
    review: Review = sample.review()
    name, old = next((name, one) for name, one in review.requirements.items() if one.verdict == "compliant")
    loop = next(name for name, one in review.loops.items() if any(r.curve for r in one.responses.values()))
    response = next(name for name, one in review.loops[loop].responses.items() if one.curve)
    before = review.loops[loop].responses[response]
    assert before.curve is not None
    curve = Curve(before.curve.time, tuple(2 * value for value in before.curve.value))
    responses = {**review.loops[loop].responses, response: replace(before, curve=curve)}
    new: Review = replace(
        review,
        requirements={**review.requirements, name: replace(old, verdict="open", text=f"{old.text} {HOSTILE}")},
        loops={**review.loops, loop: replace(review.loops[loop], responses=responses)},
    )
    return differences(review, new, ToolReview("specgate", "0"))


def test_the_page_runs_nothing_and_escapes_everything(found: Differences) -> None:
    html = page.on_screen(found)
    assert "<script" not in html
    assert "<img" not in html
    assert re.search(r"<ins>[^<]*&lt;script&gt;", html)
    assert "default-src 'none'" in unescape(html)
    assert "script-src" not in html


def test_both_responses_are_in_one_plot_told_apart_without_colour(found: Differences) -> None:
    html = page.on_screen(found)
    (plot,) = re.findall(r'<svg[^>]*class="plot".*?</svg>', html, re.DOTALL)
    paths = re.findall(r"<path[^>]*stroke-linejoin[^>]*>", plot)
    assert [("stroke-dasharray" in one) for one in paths] == [True, False]
    assert ">old<" in plot
    assert ">new<" in plot


def test_an_unexplained_verdict_is_said(found: Differences) -> None:
    words = "othing that it rests on was changed: the tool or its method was"
    assert words in page.on_screen(found)
    assert words in " ".join(terminal.render(found, width=100, colour=False).split())


def test_words_are_marked_one_by_one() -> None:
    pieces = [(one.kind, one.text) for one in marked("no more than 1.2 s at all", "no more than 4 s")]
    assert pieces == [("same", "no more than"), ("old", "1.2"), ("new", "4"), ("same", "s"), ("old", "at all")]


def test_the_paper_is_sound_tagged_and_the_same_again(found: Differences) -> None:
    content = paper.render(found, b"{}\n")
    assert content == paper.render(found, b"{}\n")
    with pikepdf.open(io.BytesIO(content)) as pdf:
        assert pdf.check_pdf_syntax() == []
        assert pdf.Root.MarkInfo.Marked
        assert pdf.attachments["differences.json"].get_file().read_bytes() == b"{}\n"
