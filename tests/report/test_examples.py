"""The reports of the example projects: complete, with every link alive and every loop drawn."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from specgate.intake.load import load
from specgate.project.types import Project
from specgate.report import html, terminal
from specgate.report.figures import wiring
from specgate.report.view import view
from specgate.review.build import review
from specgate.review.types import Review

EXAMPLES = Path(__file__).parents[2] / "example_projects"


@pytest.fixture(scope="module", params=["survey_airship/rev_a", "pilot_fermenter/rev_a"])
def example(request: pytest.FixtureRequest) -> Review:
    project = load(EXAMPLES / request.param)
    assert isinstance(project, Project)
    return review(project)


def test_the_html_report_is_whole(example: Review) -> None:
    document = html.render(example)
    ids = re.findall(r' id="([^"]*)"', document)
    assert len(ids) == len(set(ids))
    assert [link for link in re.findall(r' href="#([^"]*)"', document) if link not in ids] == []
    for name in (*example.requirements, *example.loops, *example.specification.parameters):
        assert name in re.sub(r"<wbr>", "", document)
    assert len(document) < 1_000_000


def test_every_loop_is_drawn(example: Review) -> None:
    assert [sheet.name for sheet in view(example).loops if not wiring.draw(sheet.diagram)] == []


def test_every_claim_on_a_time_or_a_level_is_drawn(example: Review) -> None:
    for audit in view(example).audits:
        if audit.picture is not None and audit.claimed != "no value claimed":
            assert audit.picture.edges
            assert audit.picture.rings


def test_the_terminal_names_every_requirement_and_every_finding(example: Review) -> None:
    text = terminal.render(example, width=120, colour=False)
    for name in example.requirements:
        assert f" {name} " in text or f" {name}\n" in text
    for finding in example.findings:
        assert f"{finding.location.path}:{finding.location.line}:{finding.location.column}: {finding.level}: " in text
