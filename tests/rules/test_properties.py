"""What is true of all findings: a place in a file that was read, a message that is a sentence, levels by the policy."""

from __future__ import annotations

from pathlib import Path
from textwrap import dedent

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review
from specgate.review.wanted import Wanted

CASES = Path(__file__).resolve().parents[1] / "rule_cases"
RESTATING = ("requirement-not-met", "requirement-open", "approximation-out-of-range", "approximation-inconclusive")


def reviewed(path: Path) -> Review:
    project = load(path)
    assert not isinstance(project, Problems)
    return review(project, Wanted(drawn=False))


@pytest.mark.parametrize("path", sorted(CASES.glob("*/*.yaml")), ids=lambda path: f"{path.parent.name}/{path.stem}")
def test_places_and_messages(path: Path) -> None:
    found = reviewed(path)
    lines = path.read_text().splitlines()
    for one in found.findings:
        assert one.location.path == path.name
        assert len(lines[one.location.line - 1]) >= one.location.column
        assert one.message[-1] not in ".,; "
        assert "None" not in one.message
        assert one.rule in found.definitions


@pytest.mark.parametrize("held", ["non_compliant", "open", "out_of_range", "inconclusive"])
def test_restating_findings_follow_the_policy_and_never_hold_by_themselves(held: str, tmp_path: Path) -> None:
    path = tmp_path / "specgate.yaml"
    path.write_text(
        dedent(f"""
        specgate: 1
        project: {{id: P-1, title: Policy, revision: A}}
        subsystems:
          lag: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1], denominator: [1, 1, 1]}}}}
        loops:
          loop:
            inputs: {{u: {{unit: 1}}}}
            signals: {{y: lag(u)}}
            breaks: {{b: y}}
            responses: {{r: {{from: u, to: y, input: step, size: 1}}}}
        requirements:
          R1:
            text: It shall.
            criterion: {{response: loop.r, measure: settling_time, band: 2 %, at_most: 8 s}}
            basis: {{approximation: second_order_settling, claimed: 8.0 s}}
          R2:
            text: It shall.
            criterion: {{response: loop.r, measure: settling_time, band: 2 %, at_most: 9 s}}
            basis: {{approximation: first_order_settling, claimed: 4.0 s}}
          R3:
            text: It shall.
            criterion: {{break: loop.b, measure: loop_type, equals: 0, evaluate: worst_case}}
        gate: {{hold_on: [{held}]}}
        """)
    )
    found = reviewed(path)
    said = {
        "non_compliant": "requirement-not-met",
        "open": "requirement-open",
        "out_of_range": "approximation-out-of-range",
        "inconclusive": "approximation-inconclusive",
    }
    levels = {one.rule: one.level for one in found.findings if one.rule in RESTATING}
    assert levels == {rule: "error" if what == held else "warning" for what, rule in said.items()}
    assert found.gate.outcome == "hold"
    assert len(found.gate.reasons) == 1
