"""Reference systems, end to end: from YAML to verdicts with limits a millionth either side of the truth.

Truths: `tests/data/step_cases.json` (25 digits; exact rational algebra and ball arithmetic, cross-checked by an
independent 55-digit integration of the differential equation and by matrix exponentials).
"""

from __future__ import annotations

import json
from collections.abc import Iterator
from decimal import Decimal, getcontext
from fractions import Fraction
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review

getcontext().prec = 60
DATA = Path(__file__).resolve().parents[1] / "data" / "step_cases.json"
CASES: dict[str, dict[str, Any]] = {case["id"]: case for case in json.loads(DATA.read_text())}
STEP = Decimal("1e-6")

# truth in the file -> (measure, extra keys of the criterion, unit of the limit)
READ = {
    "overshoot_pct": ("overshoot", "", " %"),
    "undershoot_pct": ("undershoot", "", " %"),
    "ts2": ("settling_time", ", band: 2 %", " s"),
    "ts5": ("settling_time", ", band: 5 %", " s"),
    "tr": ("rise_time", "", " s"),
    "tp": ("peak_time", "", " s"),
    "peak_abs": ("peak_deviation", "", ""),
}


def _hidden_unstable(case: dict[str, Any]) -> bool:
    return bool(case["stable_reduced"]) and not case["stable_as_given"]


def _truths(case: dict[str, Any]) -> Iterator[tuple[str, Decimal]]:
    if _hidden_unstable(case):
        return
    for key in READ:
        if case[key] is not None:
            yield key, Decimal(case[key])


def _limits(key: str, truth: Decimal, case: dict[str, Any]) -> tuple[Decimal, Decimal] | None:
    """Limits just above and just below the truth, or None where no lower one can be written (a truth of 0)."""
    if truth != 0:
        return truth * (1 + STEP), truth * (1 - STEP)
    return None


def _project(case: dict[str, Any]) -> str:
    lines = [
        "specgate: 1",
        "project: {id: R, title: Reference system, revision: A}",
        "subsystems:",
        "  plant:",
        "    input: {unit: 1}",
        "    output: {unit: 1}",
        f"    model: {{numerator: [{', '.join(case['numerator'])}], denominator: [{', '.join(case['denominator'])}]}}",
        "loops:",
        "  loop:",
        "    inputs: {u: {unit: 1}}",
        "    signals: {y: plant(u)}",
        "    responses: {r: {from: u, to: y, input: step, size: 1}}",
        "requirements:",
        "  STABLE: {text: The loop shall be stable., verification: analysis, "
        "criterion: {loop: loop, measure: stable, equals: true}}",
    ]
    for key, truth in _truths(case):
        measure, extra, unit = READ[key]
        limits = _limits(key, truth, case)
        named = {"ABOVE": limits[0], "BELOW": limits[1]} if limits else {"ABOVE": STEP}
        for name, limit in named.items():
            lines.append(
                f"  {key}-{name}: {{text: The response shall stay inside its limit., verification: analysis, "
                f"criterion: {{response: loop.r, measure: {measure}{extra}, at_most: {limit:.40g}{unit}}}}}"
            )
    return "\n".join(lines) + "\n"


@cache
def _reviewed(case_id: str, folder: Path) -> Review:
    path = folder / "specgate.yaml"
    path.write_text(_project(CASES[case_id]))
    project = load(path)
    assert not isinstance(project, Problems), [f.message for f in project.findings]
    return review(project)


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("reference")


@pytest.mark.parametrize("case_id", CASES)
def test_verdicts_a_millionth_either_side(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    for key, truth in _truths(case):
        assert found.requirements[f"{key}-ABOVE"].verdict == "compliant", key
        if _limits(key, truth, case):
            assert found.requirements[f"{key}-BELOW"].verdict == "non_compliant", key


@pytest.mark.parametrize("case_id", CASES)
def test_yes_and_no(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    expected = "compliant" if case["stable_as_given"] else "non_compliant"
    assert found.requirements["STABLE"].verdict == expected
    measures = {m.measure: m for m in found.loops["loop"].responses["r"].measures}
    assert measures["poles_at_origin"].value == case["integrators"]
    final = measures["final_value"]
    if case["final_exists"] and not _hidden_unstable(case):
        assert Fraction(final.exact or "") == Fraction(case["final_value"])
        assert final.proof == "exact"
    else:
        assert final.value is None
        assert final.reason


@pytest.mark.parametrize("case_id", CASES)
def test_printed_bounds_contain_the_truth(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    for key, truth in _truths(case):
        result = found.requirements[f"{key}-ABOVE"].criteria[0].result
        if result.exact is not None:
            assert result.lower is None
            continue
        assert result.lower is not None
        assert result.upper is not None
        slack = abs(truth) * Decimal("1e-24") + Decimal("1e-24")  # the truths themselves have 25 digits
        assert Decimal(str(result.lower)) - slack <= truth <= Decimal(str(result.upper)) + slack, key
        width = Decimal(str(result.upper)) - Decimal(str(result.lower))
        assert width <= max(abs(truth) * Decimal("1e-9"), Decimal("1e-9")), key
