"""Several files: includes, merged sections, templates."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.project.types import Project

Read = Callable[..., Project]
Said = Callable[..., list[str]]

HEAD = "specgate: 1\nproject: {id: X, title: Y, revision: A}\n"


def include(bench: str, patterns: str) -> str:
    return bench.replace("specgate: 1\n", f"specgate: 1\ninclude: {patterns}\n")


def requirement(name: str) -> str:
    return f"requirements:\n  {name}: {{text: It shall be., verification: inspection}}\n"


def test_sections_of_all_files_are_put_together(project: Read, bench: str) -> None:
    files = {"more/a.yaml": requirement("A-1"), "more/b.yaml": requirement("B-1"), "other/c.yaml": requirement("C-1")}
    found = project(include(bench, "[more/*.yaml]"), files=files)
    assert list(found.requirements) == ["VB-1-01", "A-1", "B-1"]
    assert [file.path for file in found.inputs] == ["more/a.yaml", "more/b.yaml", "specgate.yaml"]
    assert all(len(file.sha256) == 64 for file in found.inputs)


def test_paths_are_relative_to_the_file_that_says_them(project: Read, bench: str) -> None:
    files = {
        "sub/index.yaml": "include: [deep/x.yaml, ../top.yaml]\n",
        "sub/deep/x.yaml": requirement("X-1"),
        "top.yaml": requirement("T-1"),
    }
    found = project(include(bench, "sub/index.yaml"), files=files)
    assert {"X-1", "T-1"} <= set(found.requirements)
    place = found.requirements["X-1"].place
    assert str(place) == "sub/deep/x.yaml:2:3"
    assert str(place.via) == "sub/index.yaml:1:11"
    assert place.via is not None
    assert str(place.via.via) == "specgate.yaml:2:10"


def test_a_file_that_is_included_twice_is_read_once(project: Read, bench: str) -> None:
    files = {"a.yaml": "include: [c.yaml]\n", "b.yaml": "include: [c.yaml]\n", "c.yaml": requirement("C-1")}
    assert "C-1" in project(include(bench, "[a.yaml, b.yaml, '?.yaml']"), files=files).requirements


def test_a_pattern_that_matches_its_own_file_means_the_others(project: Read, bench: str) -> None:
    files = {"a.yaml": requirement("A-1")}
    assert "A-1" in project(include(bench, "['*.yaml']"), files=files).requirements


def test_every_file_that_cannot_be_read_is_reported(said: Said, bench: str) -> None:
    files = {"a.yaml": "x: [", "b.yaml": "y: %"}
    lines = said(include(bench, "[a.yaml, b.yaml, c.yaml]"), ("at_most: 3 s", "at_mots: 3 s"), files=files)
    assert [line.split(": ")[0].split(" ")[1] for line in lines] == [
        "yaml-invalid",
        "yaml-invalid",
        "yaml-invalid",
        "schema-violation",
    ]


def test_a_chain_of_includes_has_an_end(said: Said) -> None:
    files = {f"f{i}.yaml": f"include: f{i + 1}.yaml\n" for i in range(40)}
    assert "in a chain" in said(HEAD + "include: f0.yaml\n", files=files)[0]


def test_a_link_out_of_the_project_is_not_followed(tmp_path: Path) -> None:
    outside = tmp_path / "outside.yaml"
    outside.write_text(requirement("O-1"))
    home = tmp_path / "project"
    home.mkdir()
    (home / "link.yaml").symlink_to(outside)
    (home / "specgate.yaml").write_text(HEAD + "include: ['l*.yaml']\n")
    found = load(home)
    assert isinstance(found, Problems)
    assert [finding.message for finding in found.findings] == ["`link.yaml` leads out of the project folder"]


def test_one_file_is_a_project(tmp_path: Path, bench: str) -> None:
    path = tmp_path / "bench.yaml"
    path.write_text(bench)
    found = load(path)
    assert isinstance(found, Project)
    assert found.inputs[0].path == "bench.yaml"
    assert found.requirements["VB-1-01"].place.path == "bench.yaml"


@pytest.mark.parametrize("name", ["absent", "absent.yaml", "absent/specgate.yaml"])
def test_what_is_not_there(tmp_path: Path, name: str) -> None:
    found = load(tmp_path / name)
    assert isinstance(found, Problems)
    assert [finding.rule for finding in found.findings] == ["yaml-invalid"]
    assert str(tmp_path) not in found.findings[0].message


def test_a_definition_twice_shows_both_places(load: Callable[..., Project | Problems], bench: str) -> None:
    found = load(include(bench, "[a.yaml]"), files={"a.yaml": requirement("VB-1-01")})
    assert isinstance(found, Problems)
    (finding,) = found.findings
    assert str(finding.place) == "a.yaml:2:3"
    assert [str(other.place) for other in finding.related] == ["specgate.yaml:27:3"]


# --- templates -----------------------------------------------------------------------------------------------

STABLE = """\
templates:
  stable:
    text: "The {loop} loop shall be stable{why}."
    derived_from: [VB-1-01]
    verification: analysis
    criterion: {loop: "{loop}", measure: "{measure}", equals: "{answer}"}
"""
USE = "{use: stable, with: {loop: opening, measure: stable, answer: true, why: ''}"


def test_a_template_is_written_out(project: Read, bench: str) -> None:
    found = project(f"{bench}  VB-1-02: {USE}}}\n{STABLE}").requirements["VB-1-02"]
    assert found.text == "The opening loop shall be stable."
    assert found.criteria[0].limit.truth is True
    assert found.criteria[0].subject.loop == "opening"
    assert [link.id for link in found.derived_from] == ["VB-1-01"]
    assert str(found.place) == "specgate.yaml:31:3"
    assert str(found.criteria[0].place.via) == "specgate.yaml:31:18"


def test_keys_of_the_requirement_come_before_the_template(project: Read, bench: str) -> None:
    found = project(f"{bench}  VB-1-02: {USE}, derived_from: [], owner: Bench}}\n{STABLE}").requirements["VB-1-02"]
    assert found.derived_from == ()
    assert found.owner == "Bench"


def test_a_template_from_another_file(project: Read, bench: str) -> None:
    text = include(bench, "[t.yaml]") + f"  VB-1-02: {USE}}}\n"
    assert "VB-1-02" in project(text, files={"t.yaml": STABLE}).requirements


def test_a_fault_in_a_template_names_the_requirement(load: Callable[..., Project | Problems], bench: str) -> None:
    found = load(f"{bench}  VB-1-02: {USE.replace('measure: stable', 'measure: stabel')}}}\n{STABLE}")
    assert isinstance(found, Problems)
    (finding,) = found.findings
    assert finding.requirement == "VB-1-02"
    assert finding.rule == "name-unknown"
