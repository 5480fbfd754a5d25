"""A finding in the text of a template shows the use, one at the requirement shows the text: a reader needs both."""

from __future__ import annotations

from pathlib import Path
from textwrap import dedent

from specgate.intake.load import Problems, load
from specgate.review.build import review

PROJECT = """
    specgate: 1
    project: {id: P-1, title: Templates, revision: A}
    subsystems:
      lag: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1], denominator: [1, 1, 1]}}
    loops:
      loop:
        inputs: {u: {unit: 1}}
        signals: {y: lag(u)}
        responses: {r: {from: u, to: y, input: step, size: 1}}
    templates:
      quick:
        text: The {loop} shall settle in no more than {time}.
        verification: test
        criterion: {response: "{loop}.r", measure: settling_time, band: BAND, at_most: "{time}"}
    requirements:
      R-1: {use: quick, with: {loop: loop, time: 1 s}}
"""


def written(folder: Path, band: str) -> Path:
    path = folder / "specgate.yaml"
    path.write_text(dedent(PROJECT).replace("BAND", band))
    return path


def test_findings_of_rules_point_at_both_places(tmp_path: Path) -> None:
    project = load(written(tmp_path, "2 %"))
    assert not isinstance(project, Problems)
    said = {one.rule: one for one in review(project).findings}
    not_met = said["requirement-not-met"]
    assert (not_met.location.line, [one.line for one in not_met.related]) == (17, [13])
    assert not_met.related[0].message == "the text is that of the template `quick`"
    unrecorded = said["verification-without-evidence"]
    assert (unrecorded.location.line, [one.line for one in unrecorded.related]) == (14, [17])
    assert unrecorded.related[0].message == "the template `quick` is used here"


def test_faults_of_the_files_point_at_both_places(tmp_path: Path) -> None:
    problems = load(written(tmp_path, "2 m"))
    assert isinstance(problems, Problems)
    (fault,) = problems.findings
    assert (fault.place.line, [one.place.line for one in fault.related]) == (15, [17])
