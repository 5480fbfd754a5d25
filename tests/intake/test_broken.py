"""Broken inputs: each is refused with exactly the messages that stand beside it in `tests/broken`.

The messages are written anew, on purpose and to be read, with `SPECGATE_REWRITE=1 pytest tests/intake/test_broken.py`.
"""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

BROKEN = Path(__file__).parents[1] / "broken"
CASES = sorted(path for path in BROKEN.iterdir() if path.suffix != ".txt")


def line(finding: Finding) -> str:
    via = f" (by {finding.place.via})" if finding.place.via else ""
    related = "".join(f" [{other.place}: {other.message}]" for other in finding.related)
    return f"{finding.place}{via}: {finding.rule}: {finding.message}{related}"


def test_there_are_enough() -> None:
    assert len(CASES) >= 40


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_the_messages(path: Path) -> None:
    found = load(path)
    assert isinstance(found, Problems)
    assert all(finding.level is Level.ERROR for finding in found.findings)
    text = "".join(f"{line(finding)}\n" for finding in found.findings)
    expected = path.with_suffix(".txt")
    if os.environ.get("SPECGATE_REWRITE"):
        expected.write_text(text, encoding="utf-8")
    assert text == expected.read_text(encoding="utf-8")


def test_every_rule_of_the_intake_is_among_them() -> None:
    rules = {
        row.split(": ")[1] for path in BROKEN.glob("*.txt") for row in path.read_text(encoding="utf-8").splitlines()
    }
    assert rules == {
        "dimension-mismatch",
        "id-duplicate",
        "name-unknown",
        "schema-violation",
        "sign-ambiguous-limit",
        "unit-unknown",
        "yaml-invalid",
    }


def test_no_messages_without_an_input() -> None:
    assert {path.stem for path in BROKEN.glob("*.txt")} == {path.stem for path in CASES}
