"""Small projects, passing and failing, each with exactly the findings that stand in it behind `#!`.

A line is `level rule line:column message`; a case without such lines has no findings. A file of the same name in the
folder `baseline` beside a case is frozen, and the case is run with that baseline.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.freeze import freeze
from specgate.rules.table import RULES

CASES = Path(__file__).resolve().parents[1] / "rule_cases"
FILES = sorted(CASES.glob("*/*.yaml"))


@pytest.mark.parametrize("path", FILES, ids=lambda path: f"{path.parent.name}/{path.stem}")
def test_findings_expected_and_no_others(path: Path) -> None:
    expected = [line[3:] for line in path.read_text().splitlines() if line.startswith("#! ")]
    assert found(path) == expected


def found(path: Path) -> list[str]:
    project, before = loaded(path), path.parent / "baseline" / path.name
    frozen = freeze(loaded(before)).links if before.exists() else None
    return [
        f"{one.level} {one.rule} {one.location.line}:{one.location.column} {one.message}"
        for one in review(project, baseline=frozen).findings
    ]


def loaded(path: Path) -> Project:
    project = load(path)
    assert not isinstance(project, Problems), [one.message for one in project.findings]
    return project


@pytest.mark.parametrize("rule", RULES)
def test_every_rule_has_a_case_that_it_reports_and_one_that_it_does_not(rule: str) -> None:
    folder = CASES / rule.replace("-", "_")
    speaks = [f" {rule} " in line for path in folder.glob("*.yaml") for line in expected_lines(path)]
    silent = [all(f" {rule} " not in line for line in expected_lines(path)) for path in FILES]
    assert any(speaks)
    assert any(silent)


def expected_lines(path: Path) -> list[str]:
    return [line for line in path.read_text().splitlines() if line.startswith("#! ")]
