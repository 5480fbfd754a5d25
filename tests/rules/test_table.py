"""The table of rules: a row a file, the slugs of the contract, a text for each."""

from __future__ import annotations

from pathlib import Path

import pytest

import specgate.rules
from specgate.rules.table import RULES

CONTRACT = {
    *("requirement-not-met", "requirement-open", "approximation-out-of-range", "approximation-inconclusive"),
    *("claim-disagrees-with-formula", "measure-does-not-exist", "not-answered-yet", "hidden-unstable-mode"),
    *("hidden-mode", "algebraic-loop", "improper-model", "unused-subsystem", "value-without-source"),
    *("requirement-orphan", "dangling-link", "derivation-cycle"),
}
ADDED = {
    "model-assumed",
    "model-beyond-validity",
    "stand-in-out-of-range",
    "dead-time-as-fraction",
    "hidden-slow-mode",
    "near-cancellation-tail",
    "quasi-integrator",
    *("hidden-from-samples", "threshold-loosened", "range-exceeded", "range-undecided", "rest-outside-range"),
    *("fragile-result", "limit-says-nothing"),
    *("requirement-childless", "text-duplicate", "requirement-unallocated", "allocation-unused"),
    *("verification-missing", "verification-without-criterion", "verification-without-evidence"),
    *("document-unregistered", "document-issues-differ"),
    *("text-disagrees-with-limit", "text-to-be-determined", "text-without-one-shall", "text-unverifiable"),
    *("budget-overdrawn", "budget-undecided", "budget-doubtful"),
    *(
        "evidence-stale",
        "evidence-undecided",
        "evidence-contradicts-analysis",
        "test-disagrees-with-model",
        "record-altered",
        "waiver-not-in-force",
        "waiver-insufficient",
        "waiver-unneeded",
    ),
    "link-stale",
}
NO_ROWS = {"__init__", "rule", "table"}


def test_the_slugs_are_those_of_the_contract() -> None:
    assert set(RULES) == CONTRACT | ADDED


def test_every_file_is_a_row_and_every_row_a_file() -> None:
    files = {path.stem for path in Path(specgate.rules.__file__).parent.glob("*.py")} - NO_ROWS
    assert files == {name.replace("-", "_") for name in RULES}


@pytest.mark.parametrize("name", list(RULES))
def test_every_row_explains_itself(name: str) -> None:
    rule = RULES[name]
    summary, _, rest = rule.text.strip().partition("\n\n")
    assert rule.name == name
    assert summary.endswith(".")
    assert len(rest) > 80
    assert rule.level.split()[0].strip(",;") in ("error", "warning", "note")
