"""The project that `specgate new` writes: it passes, says nothing, and its comments do not lie."""

from __future__ import annotations

from importlib.resources import files
from pathlib import Path

import pytest

from specgate.intake.load import load
from specgate.project.types import Project
from specgate.review.build import review
from specgate.review.types import Review

STARTER = files("specgate.templates") / "starter" / "specgate.yaml"


@pytest.fixture(scope="module")
def reviewed(tmp_path_factory: pytest.TempPathFactory) -> Review:
    """Review the starter project."""
    path: Path = tmp_path_factory.mktemp("starter") / "specgate.yaml"
    path.write_bytes(STARTER.read_bytes())
    project = load(path)
    assert isinstance(project, Project), [f"{f.place}: {f.message}" for f in project.findings]
    return review(project)


def test_it_passes_without_a_word(reviewed: Review) -> None:
    assert reviewed.gate.outcome == "pass"
    assert reviewed.findings == ()
    assert {found.verdict for found in reviewed.requirements.values()} == {"compliant"}


def test_its_claims_are_sound(reviewed: Review) -> None:
    bases = [criterion.basis for found in reviewed.requirements.values() for criterion in found.criteria]
    assert {basis.standing for basis in bases} == {"sound"}
    assert {basis.kind for basis in bases} == {"approximation", "computed"}


def test_the_settling_time_is_that_of_its_pair(reviewed: Review) -> None:
    """Without the sensor's 10 ms the loop is 0.3 s^2 + s + 1.68: sigma = 1/0.6, zeta = 0.7043.

    Largest root of exp(-sigma t) |cos(wd t) + sigma/wd sin(wd t)| = 0.02, found by bisection: 2.5226 s.
    """
    (criterion,) = reviewed.requirements["LR-REQ-1"].criteria
    assert criterion.result.value == pytest.approx(2.5226, rel=0.005)


def test_what_is_due_later_is_not_held_against_it(reviewed: Review) -> None:
    outcomes = [method.outcome for method in reviewed.requirements["LR-REQ-1"].methods]
    assert outcomes == ["compliant", "due_later"]
