"""Reference loops, end to end: from YAML to verdicts with limits a millionth either side of the truth.

Truths: `tests/data/margin_cases.json` (25 digits; exact rational algebra and ball arithmetic). Loops with dead time and
sampled ones are in the same file.
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
from specgate.review.wanted import Wanted

getcontext().prec = 60
DATA = Path(__file__).resolve().parents[1] / "data" / "margin_cases.json"
CASES: dict[str, dict[str, Any]] = {
    case["id"]: case for case in json.loads(DATA.read_text()) if "Ts" not in case and "delay" not in case
}
STEP = Decimal("1e-6")


def _truths(case: dict[str, Any]) -> Iterator[tuple[str, Decimal, str]]:
    """Yield (measure, truth in the unit of the limit, that unit) of what has a value."""
    if case["gcs"]:
        yield "crossover_frequency", Decimal(case["gcs"][0]), " rad/s"
    if not case["stable_cl"]:
        return
    for key, measure in (("gm_up", "gain_margin_up"), ("gm_dn", "gain_margin_down"), ("gm", "gain_margin")):
        if case[key] is not None:
            factor = Decimal(case[key])
            yield measure, max(factor, 1 / factor), ""
    if case["pm_deg"] is not None:
        yield "phase_margin", abs(Decimal(case["pm_deg"])), " deg"
    yield "sensitivity_peak", Decimal(case["ms"]), ""
    yield "least_distance", 1 / Decimal(case["ms"]), ""
    if case["bw"] is not None:
        yield "bandwidth", Decimal(case["bw"]), " rad/s"


def _subject(measure: str) -> str:
    return "response: loop.follow" if measure == "bandwidth" else "break: loop.main"


def _project(case: dict[str, Any]) -> str:
    lines = [
        "specgate: 1",
        "project: {id: R, title: Reference loop, revision: A}",
        "subsystems:",
        "  plant:",
        "    input: {unit: 1}",
        "    output: {unit: 1}",
        f"    model: {{numerator: [{', '.join(case['num'])}], denominator: [{', '.join(case['den'])}]}}",
        "loops:",
        "  loop:",
        "    inputs: {u: {unit: 1}}",
        "    signals: {y: plant(u - y)}",
        "    breaks: {main: y}",
        "    responses: {follow: {from: u, to: y, input: step, size: 1}}",
        "requirements:",
        "  STABLE: {text: The loop shall be stable., verification: analysis, "
        "criterion: {loop: loop, measure: stable, equals: true}}",
    ]
    for measure, truth, unit in _truths(case):
        for name, limit in (("ABOVE", truth * (1 + STEP)), ("BELOW", truth * (1 - STEP))):
            for side in ("at_least", "at_most"):
                lines.append(
                    f"  {measure}-{name}-{side}: {{text: The loop shall keep its limit., verification: analysis, "
                    f"criterion: {{{_subject(measure)}, measure: {measure}, {side}: {limit:.40g}{unit}}}}}"
                )
    return "\n".join(lines) + "\n"


@cache
def _reviewed(case_id: str, folder: Path) -> Review:
    path = folder / "specgate.yaml"
    path.write_text(_project(CASES[case_id]))
    project = load(path)
    assert not isinstance(project, Problems), [f.message for f in project.findings]
    return review(project, Wanted(drawn=False))


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("reference")


@pytest.mark.parametrize("case_id", CASES)
def test_verdicts_a_millionth_either_side(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    wanted = {
        ("ABOVE", "at_least"): "non_compliant",
        ("ABOVE", "at_most"): "compliant",
        ("BELOW", "at_least"): "compliant",
        ("BELOW", "at_most"): "non_compliant",
    }
    for measure, _, _ in _truths(case):
        for (name, side), verdict in wanted.items():
            assert found.requirements[f"{measure}-{name}-{side}"].verdict == verdict, (measure, name, side)


@pytest.mark.parametrize("case_id", CASES)
def test_printed_bounds_contain_the_truth(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    for measure, truth, _ in _truths(case):
        result = found.requirements[f"{measure}-ABOVE-at_most"].criteria[0].result
        assert result.value is not None
        slack = abs(truth) * Decimal("1e-15" if measure == "crossover_frequency" else "1e-22")
        if result.exact is not None:
            exact = Fraction(result.exact)
            assert abs(Decimal(exact.numerator) / exact.denominator - truth) <= slack, measure
            continue
        lower, upper = result.lower, result.upper
        assert Decimal(str(lower)) - slack <= truth <= Decimal(str(upper)) + slack, measure
        assert Decimal(str(upper)) - Decimal(str(lower)) <= abs(truth) * Decimal("1e-9"), measure


@pytest.mark.parametrize("case_id", CASES)
def test_what_is_reported_on_every_break(case_id: str, folder: Path) -> None:
    case, found = CASES[case_id], _reviewed(case_id, folder)
    opened = found.loops["loop"].breaks["main"]
    gain = [one for one in opened.crossings if one.kind == "gain"]
    assert [one.frequency.value for one in gain] == pytest.approx([float(w) for w in case["gcs"]], rel=1e-11)
    assert len([one for one in opened.crossings if one.kind == "phase"]) >= case["n_pc"]
    margins = {m.measure: m for m in opened.measures}
    for measure in ("gain_margin", "phase_margin", "delay_margin", "sensitivity_peak"):
        one = margins[measure]
        if not case["stable_cl"]:
            assert (one.value, one.infinite) == (None, None)
            assert one.reason
    assert (margins["gain_margin"].infinite is True) is (case["stable_cl"] and case["gm"] is None)
    assert (margins["phase_margin"].infinite is True) is (case["stable_cl"] and case["pm_deg"] is None)
