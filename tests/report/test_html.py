"""The HTML report: one file, nothing loaded, nothing run but its own script."""

from __future__ import annotations

import base64
import hashlib
import re
from dataclasses import replace
from html.parser import HTMLParser
from types import ModuleType

import pytest

from specgate.report import html

VOID = {"meta", "input", "br", "wbr", "link", "img"}


class Outline(HTMLParser):
    """Collects elements, ids, links and texts, and checks that elements nest."""

    def __init__(self, document: str) -> None:
        super().__init__()
        self.open: list[str] = []
        self.elements: list[tuple[str, dict[str, str]]] = []
        self.inside: dict[str, list[str]] = {}
        self.feed(document)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {key: value or "" for key, value in attrs}))
        if tag not in VOID:
            self.open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.elements.append((tag, {key: value or "" for key, value in attrs}))

    def handle_endtag(self, tag: str) -> None:
        assert self.open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self.open:
            self.inside.setdefault(self.open[-1], []).append(data)


@pytest.fixture(scope="module")
def outline(sample_html: str) -> Outline:
    return Outline(sample_html)


def test_elements_nest_and_ids_are_unique(outline: Outline) -> None:
    assert outline.open == []
    ids = [attributes["id"] for _, attributes in outline.elements if "id" in attributes]
    assert len(ids) == len(set(ids))


def test_every_link_leads_somewhere_in_the_file(outline: Outline) -> None:
    ids = {attributes["id"] for _, attributes in outline.elements if "id" in attributes}
    links = [attributes["href"] for tag, attributes in outline.elements if tag == "a"]
    assert len(links) > 40
    assert [link for link in links if not link.startswith("#") or link[1:] not in ids] == []


def test_nothing_is_loaded_and_nothing_else_is_run(sample_html: str, outline: Outline) -> None:
    for tag, attributes in outline.elements:
        assert (
            tag not in {"link", "iframe", "object", "embed", "base", "img", "form"} or attributes.get("id") == "filter"
        )
        assert not [key for key in attributes if key.startswith("on") or key in ("src", "style", "action", "srcset")]
    assert not re.search(r"url\((?!data:|#)", sample_html)
    assert [tag for tag, _ in outline.elements].count("script") == 1


def test_the_security_policy_names_the_script_and_the_styles(outline: Outline) -> None:
    policy = next(a["content"] for tag, a in outline.elements if a.get("http-equiv") == "Content-Security-Policy")
    assert policy.startswith("default-src 'none'; ")
    assert "unsafe" not in policy
    for tag in ("script", "style"):
        for body in outline.inside[tag]:
            digest = base64.b64encode(hashlib.sha256(body.encode()).digest()).decode()
            assert f"'sha256-{digest}'" in policy


def test_every_requirement_carries_what_the_filter_asks(sample: ModuleType, outline: Outline) -> None:
    rows = {a["id"]: a for tag, a in outline.elements if tag == "tbody" and a.get("class") == "requirement"}
    assert len(rows) == len(sample.review().requirements)
    row = rows["row-BD-SYS-11"]
    assert (row["data-verdict"], row["data-standing"], row["data-loops"], row["data-owner"]) == (
        "non_compliant",
        "out_of_range",
        "duct_pressure",
        "Controls",
    )


def test_plots_carry_what_the_pointer_reads(outline: Outline) -> None:
    import json

    plots = [json.loads(a["data-plot"]) for _, a in outline.elements if "data-plot" in a]
    assert len(plots) >= 5
    for plot in plots:
        points = len(plot["across"]["values"])
        assert points > 100
        assert all(len(curve["values"]) == points for curve in plot["curves"])
    assert plots[0]["curves"][0]["unit"] == "Pa"


def test_texts_stay_texts(sample: ModuleType) -> None:
    review = sample.review()
    evil = """</script></style><script>alert(1)</script><img src=x onerror=alert(1)>"'&{{ 7*7 }}"""
    requirement = replace(review.requirements["BD-SYS-11"], text=evil, title=evil, owner=evil, reason=evil)
    loop = replace(review.loops["fan_speed"], title=evil, wiring={evil: "speed_controller(set_speed)"})
    document = html.render(
        replace(
            review,
            project=replace(review.project, title=evil, id=evil),
            requirements={**review.requirements, "BD-SYS-11": requirement, evil: requirement},
            loops={**review.loops, "fan_speed": loop, evil: loop},
            findings=tuple(replace(f, message=f"`{evil}` {evil}") for f in review.findings),
        )
    )
    outline = Outline(document)
    assert outline.open == []
    assert [tag for tag, _ in outline.elements].count("script") == 1
    assert not [tag for tag, a in outline.elements if tag == "img" or "onerror" in a]
    assert "49" not in {text.strip() for text in outline.inside["title"]}


def test_it_is_one_moderate_file(sample_html: str) -> None:
    assert len(sample_html) < 700_000
