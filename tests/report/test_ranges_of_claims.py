"""From YAML to paper: claims that stand have the pictures of their ranges, loosened thresholds stand on page one."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.report import html, pdf
from specgate.report.view import view
from specgate.review.build import review
from specgate.review.types import Review
from tests.report.test_pdf import text

PROJECT = """
specgate: 1
project: {id: RP-1, title: Ranges, revision: A, date: 2026-11-02}
{policy}
subsystems:
  flap: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [9], denominator: [1, 3, 9]}}
  rail: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1], denominator: [1, 0.8, 0]}}
loops:
  bench:
    inputs: {u: {unit: 1}}
    signals: {y: flap(u)}
    responses: {r: {from: u, to: y, input: step, size: 1}}
  drive:
    inputs: {u: {unit: 1}}
    signals: {x: rail(u - x)}
    breaks: {b: x}
    responses: {r: {from: u, to: x, input: step, size: 1}}
requirements:
  R-1:
    text: The flap shall settle.
    verification: analysis
    criterion: {response: bench.r, measure: settling_time, band: 2 %, at_most: 4 s}
    basis: {approximation: second_order_settling, claimed: 2.7 s}
  R-2:
    text: The rail shall not swing.
    verification: analysis
    criterion: {response: drive.r, measure: overshoot, at_most: 35 %}
    basis: {approximation: overshoot_from_phase_margin, claimed: 22.3 %}
  R-3:
    text: The rail shall be damped.
    verification: analysis
    criterion: {loop: drive, measure: damping_ratio, at_least: 0.3}
    basis: {approximation: damping_from_phase_margin, claimed: 0.431}
"""
LOOSER = "approximations: {dominant_pair: {separation: 3}, damping_from_phase_margin: {phase_margin: 70}}"
TIGHTER = "approximations: {dominant_pair: {separation: 10}, damping_from_phase_margin: {phase_margin: 40}}"


@pytest.fixture
def reviewed(tmp_path: Path) -> Callable[[str], Review]:
    def build(policy: str) -> Review:
        path = tmp_path / "specgate.yaml"
        path.write_text(PROJECT.replace("{policy}", policy))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return review(project)

    return build


def test_claims_that_stand_have_the_pictures_of_their_ranges(reviewed: Callable[[str], Review]) -> None:
    found = reviewed("")
    assert [one.standing for one in found.requirements.values()] == ["sound"] * 3
    settling, overshoot, damping = view(found).audits
    assert settling.pictured
    assert settling.error_over_damping is not None
    assert settling.map is not None
    assert overshoot.pictured
    assert overshoot.error_over_damping is None  # what it is read from is no pair, but a margin
    assert overshoot.map is not None
    assert not damping.pictured
    page = html.render(found)
    assert "Where they stand in their ranges" in page
    assert page.count('class="of-range"') == 3


def test_a_chain_is_shown_link_by_link(reviewed: Callable[[str], Review]) -> None:
    basis = reviewed("").requirements["R-2"].criteria[0].basis
    chain = ("damping_from_phase_margin", "dominant_pair", "second_order_overshoot", "overshoot_from_phase_margin")
    assert basis.chain == chain
    assert {one.approximation for one in basis.conditions} == {"damping_from_phase_margin", "dominant_pair"}
    assert all(name.replace("_", " ") in html.render(reviewed("")) for name in chain)


def test_a_loosened_threshold_is_a_warning_and_stands_on_page_one(
    reviewed: Callable[[str], Review], tool: Callable[[str], str]
) -> None:
    found = reviewed(LOOSER)
    warned = [one for one in found.findings if one.rule == "threshold-loosened"]
    assert [one.level for one in warned] == ["warning", "warning"]
    first = html.render(found).split('id="matrix"')[0]
    paper = text(pdf.render(found, {}), tool, "-l", "1")
    for shown in (first, paper):
        words = " ".join(shown.split())
        assert "Thresholds that this project has loosened" in words
        assert "separation: 3 in place of 5" in words
        assert "phase margin: 70 in place of 60" in words


def test_a_tightened_threshold_is_not_and_may_break_the_range(reviewed: Callable[[str], Review]) -> None:
    found = reviewed(TIGHTER)
    assert not any(one.rule == "threshold-loosened" for one in found.findings)
    assert "Thresholds that this project has loosened" not in html.render(found)
    standings = {name: one.standing for name, one in found.requirements.items()}
    assert standings == {"R-1": "sound", "R-2": "out_of_range", "R-3": "out_of_range"}  # 43.1 deg are more than 40
    broken = [one for one in found.requirements["R-3"].criteria[0].basis.conditions if one.holds is False]
    assert [(one.key, one.policy) for one in broken] == [("phase_margin", "tightened by the project to 40")]
