"""The example projects and the example of the format, end to end, against figures that specgate had no part in.

Figures: `*.figures.yaml`, written by `reference/write_figures.py` (scipy; the method is named in the files). Verdicts,
standings and findings: `*.expected.yaml`, decided by hand from those figures.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml

from specgate.intake.load import load
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.types import MeasureResult, Review

HERE = Path(__file__).parent
PROJECTS = HERE.parent.parent / "example_projects"
REVISIONS = [(name, revision) for name in ("survey_airship", "pilot_fermenter") for revision in ("rev_a", "rev_b")]
EACH = pytest.mark.parametrize(("name", "revision"), REVISIONS)
RELATIVE = 1e-7
"""What the reference is good for, with a digit or two to spare."""


@cache
def reviewed(folder: Path) -> Review:
    project = load(folder)
    assert isinstance(project, Project), project.findings
    return review(project)


@cache
def read(path: Path) -> dict[str, Any]:
    return dict(yaml.safe_load(path.read_text(encoding="utf-8")))


def example(name: str, revision: str) -> Review:
    return reviewed(PROJECTS / name / revision)


def expected(name: str, revision: str) -> dict[str, Any]:
    return read(HERE / name / f"{revision}.expected.yaml")


def figures(name: str, revision: str) -> dict[str, Any]:
    return read(HERE / name / f"{revision}.figures.yaml")


def by_measure(measures: tuple[MeasureResult, ...]) -> dict[str, MeasureResult]:
    return {measure.measure: measure for measure in measures}


def subject(finding: Any) -> str:
    place = f"{finding.loop}.{finding.response}" if finding.loop and finding.response else None
    return finding.requirement or finding.subsystem or place or finding.loop or ""


def findings(result: Review) -> list[list[str]]:
    return sorted([finding.rule, finding.level, subject(finding)] for finding in result.findings)


@EACH
def test_the_gate(name: str, revision: str) -> None:
    assert example(name, revision).gate.outcome == expected(name, revision)["gate"]


@EACH
def test_verdict_and_standing_of_every_requirement(name: str, revision: str) -> None:
    special = expected(name, revision)["requirements"]
    found = {key: [item.verdict, item.standing] for key, item in example(name, revision).requirements.items()}
    assert found == {key: special.get(key, ["compliant", "sound"]) for key in found}
    assert special.keys() <= found.keys()


@EACH
def test_findings(name: str, revision: str) -> None:
    assert findings(example(name, revision)) == sorted(expected(name, revision)["findings"])


@EACH
def test_figures_of_every_response(name: str, revision: str) -> None:
    result, seen = example(name, revision), 0
    for path, wanted in figures(name, revision)["responses"].items():
        loop, response = path.split(".")
        found = by_measure(result.loops[loop].responses[response].measures)
        scale = wanted["peak_deviation"]
        for measure, value in wanted.items():
            got = found[measure].value
            smallest = RELATIVE * (scale if measure.endswith(("_value", "_deviation")) else 1)
            assert (got is None) == (value is None), (path, measure, got)
            assert value is None or got == pytest.approx(value, rel=RELATIVE, abs=smallest), (path, measure)
            seen += 1
    assert seen > 120


@EACH
def test_margins_of_every_break(name: str, revision: str) -> None:
    for path, wanted in figures(name, revision)["breaks"].items():
        loop, opened = path.split(".")
        found = by_measure(example(name, revision).loops[loop].breaks[opened].measures)
        for measure, value in wanted.items():
            if value == "infinite":
                assert found[measure].infinite, (path, measure)
            else:
                assert found[measure].value == pytest.approx(value, rel=RELATIVE), (path, measure)


@EACH
def test_poles_of_every_loop(name: str, revision: str) -> None:
    result = example(name, revision)
    for loop, poles in figures(name, revision)["poles"].items():
        found = [(p.real, p.imaginary) for p in result.loops[loop].poles for _ in range(p.multiplicity)]
        assert len(found) == len(poles), loop
        for real, imaginary in poles:
            nearest = min(found, key=lambda pole: abs(complex(*pole) - complex(real, imaginary)))
            assert complex(*nearest) == pytest.approx(complex(real, imaginary), rel=1e-6), loop


@pytest.mark.parametrize("revision", ["rev_a", "rev_b"])
def test_damping_ratio_is_that_of_the_least_damped_pole(revision: str) -> None:
    poles = [complex(*pole) for pole in figures("survey_airship", revision)["poles"]["pitch_trim"]]
    (criterion,) = example("survey_airship", revision).requirements["SAS-SYS-106"].criteria
    assert criterion.result.value == pytest.approx(min(-pole.real / abs(pole) for pole in poles), rel=RELATIVE)


@EACH
def test_settling_into_bands_of_their_own(name: str, revision: str) -> None:
    for key, seconds in figures(name, revision)["settling_times"].items():
        result = example(name, revision).requirements[key].criteria[0].result
        assert result.value == pytest.approx(seconds, rel=RELATIVE), key
        assert result.unit == "s"


@EACH
def test_claim_formula_and_error_of_bases(name: str, revision: str) -> None:
    for key, wanted in expected(name, revision)["bases"].items():
        basis = example(name, revision).requirements[key].criteria[0].basis
        assert basis.claimed is not None
        assert basis.claimed.value == pytest.approx(wanted["claimed"])
        if wanted["formula"] is None:
            assert basis.formula is None or basis.formula.value is None, key
            continue
        assert basis.formula is not None
        assert basis.formula.value == pytest.approx(wanted["formula"], rel=RELATIVE), key
        assert basis.error is not None
        assert basis.error.relative == pytest.approx(wanted["error"], abs=1e-8), key
        assert basis.error.side == wanted.get("side", basis.error.side)


def test_size_of_the_examples() -> None:
    results = [example(name, "rev_b") for name, _ in REVISIONS[::2]]
    for result in results:
        assert len(result.loops) >= 3
        assert len(result.specification.subsystems) >= 12
        assert len(result.requirements) >= 25


def test_revision_b_is_another_design_under_the_same_needs() -> None:
    for name, _ in REVISIONS[::2]:
        old, new = example(name, "rev_a"), example(name, "rev_b")
        assert (old.project.id, old.project.revision, new.project.revision) == (new.project.id, "A", "B")
        needs = [key for key, item in old.requirements.items() if item.decided_by == "derived"]
        assert needs
        assert all(new.requirements[key].text == old.requirements[key].text for key in needs)


class TestExampleOfTheFormat:
    """The sluice-gate hoist, as the format's description prints it."""

    folder = HERE / "spec_format"

    @property
    def result(self) -> Review:
        return reviewed(self.folder)

    @property
    def wanted(self) -> dict[str, Any]:
        return read(self.folder / "expected.yaml")

    def test_gate_verdicts_and_standings(self) -> None:
        assert self.result.gate.outcome == self.wanted["gate"]
        for key, wanted in self.wanted["requirements"].items():
            found = self.result.requirements[key]
            assert found.verdict == wanted["verdict"], key
            assert "standing" not in wanted or found.standing == wanted["standing"], key
            assert "value" not in wanted or found.criteria[0].result.value == pytest.approx(wanted["value"], abs=1e-11)

    def test_figures(self) -> None:
        loop = self.result.loops["gate_position"]
        sheets = {f"gate_position.{key}": item.measures for key, item in loop.responses.items()}
        sheets |= {f"gate_position.{key}": item.measures for key, item in loop.breaks.items()}
        sheets["gate_position"] = loop.measures
        for path, wanted in self.wanted["measures"].items():
            found = by_measure(sheets[path])
            for measure, value in wanted.items():
                if value == "infinite":
                    assert found[measure].infinite, (path, measure)
                else:
                    assert found[measure].value == pytest.approx(value, rel=1e-11, abs=1e-13), (path, measure)

    def test_poles(self) -> None:
        found = [(pole.real, pole.imaginary) for pole in self.result.loops["gate_position"].poles]
        for real, imaginary in self.wanted["poles"]["gate_position"]:
            assert any(complex(*pole) == pytest.approx(complex(real, imaginary), rel=1e-11) for pole in found)

    def test_claim_formula_and_error(self) -> None:
        (criterion,) = self.result.requirements["GH-SYS-031"].criteria
        wanted, basis = self.wanted["basis"]["GH-SYS-031"], criterion.basis
        assert basis.claimed is not None
        assert basis.formula is not None
        assert basis.error is not None
        assert (basis.claimed.value, basis.error.side) == (wanted["claimed"], wanted["side"])
        assert basis.formula.value == pytest.approx(wanted["formula"], rel=1e-11)
        assert basis.error.relative == pytest.approx(wanted["relative_error"], rel=1e-9)
        separation = next(item for item in basis.conditions if item.key == "separation")
        assert separation.found == pytest.approx(0.0820630085903575, rel=1e-5)  # six digits are printed
        assert separation.holds is False

    def test_findings(self) -> None:
        found = findings(self.result)
        assert all(item in found for item in self.wanted["findings"])
