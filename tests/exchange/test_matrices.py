"""Matrices for spreadsheets: every requirement and method once, close-out as a verification control document has it."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import pytest

from specgate.exchange.matrices import MATRICES, VERIFICATION
from specgate.intake.load import load
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.types import Review

CASES = Path(__file__).resolve().parents[1] / "rule_cases"


def reviewed(name: str) -> Review:
    project = load(CASES / name)
    assert isinstance(project, Project)
    return review(project)


def rows(kind: str, of: Review) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(MATRICES[kind](of), newline="")))


def test_verification_has_a_line_for_each_method() -> None:
    found = reviewed("evidence_stale/replaced_or_not.yaml")
    lines = rows("verification-csv", found)
    assert list(lines[0]) == list(VERIFICATION)
    shown = [(one["requirement"], one["method"], one["outcome"], one["evidence"], one["close_out"]) for one in lines]
    assert shown == [
        ("N-1", "", "", "", "open"),
        ("R-1", "analysis", "compliant", "", "closed"),
        ("R-1", "test", "open", "RC-TR-1", "open"),
        ("R-2", "analysis", "compliant", "", "closed"),
        ("R-2", "test", "compliant", "RC-TR-2; RC-TR-3", "closed"),
        ("R-3", "analysis", "compliant", "", "closed"),
        ("R-3", "test", "due_later", "RC-TR-4", "open"),
        ("R-4", "analysis", "compliant", "", "closed"),
        ("R-4", "test", "compliant", "RC-TR-5", "closed"),
    ]


def test_what_is_waived_is_closed_and_stays_non_compliant() -> None:
    lines = rows("verification-csv", reviewed("waiver_insufficient/enough.yaml"))
    waived = [one for one in lines if one["requirement"] == "R-2"]
    assert {(one["compliance"], one["close_out"], one["waivers"]) for one in waived} == {
        ("non_compliant", "closed", "W-2")
    }


def test_allocation_marks_what_is_allocated() -> None:
    lines = rows("allocation-csv", reviewed("dangling_link/both_kinds.yaml"))
    marked = {one["requirement"]: [one["louvre"], one["vane"], one["unknown"]] for one in lines}
    assert marked == {"N-1": ["", "", ""], "R-1": ["x", "", ""], "R-2": ["x", "x", "luovre"]}


def test_coverage_counts() -> None:
    figures = {
        one["figure"]: int(one["number"]) for one in rows("coverage-csv", reviewed("waiver_insufficient/enough.yaml"))
    }
    assert figures["requirements"] == 4
    assert figures["non-compliant"] == 3
    assert figures["non-compliant and waived"] == 3
    assert figures["methods"] == figures["methods closed out"] == 4


@pytest.mark.parametrize("text", ["=1+1", "+1", "-2 shall hold", "@x"])
def test_no_cell_is_a_formula(text: str, tmp_path: Path) -> None:
    body = (CASES / "text_duplicate" / "one_word_apart.yaml").read_text().replace("The louvre shall open.", f'"{text}"')
    path = tmp_path / "specgate.yaml"
    path.write_text(body)
    project = load(path)
    assert isinstance(project, Project)
    assert rows("verification-csv", review(project))[0]["text"] == f"'{text}"
