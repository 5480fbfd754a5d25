"""A sampled loop in the report: its modes are shown in s, its exact polynomials in z."""

from __future__ import annotations

from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.report.html import render
from specgate.report.parts.sampled import poles
from specgate.review.build import review

CASES = Path(__file__).resolve().parents[1] / "rule_cases" / "hidden_from_samples"


@pytest.mark.parametrize("name", ["swings_between", "nothing_hidden"])
def test_a_sampled_loop_is_shown(name: str) -> None:
    project = load(CASES / f"{name}.yaml")
    assert not isinstance(project, Problems)
    found = review(project)
    text = render(found)
    loop = found.loops["level"]
    assert all(pole.real < 0 for pole in poles(loop))
    assert "does not decay" not in text.split("Measures of the loop")[0].split("Poles")[-1]
    assert ("z³" in text) == (name == "swings_between")
