"""From YAML to assessments, for the tests of this room."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path
from textwrap import dedent

import pytest

from specgate.analysis.analyse import analyse
from specgate.compliance.assess import assess
from specgate.compliance.assessment import Assessment
from specgate.intake.load import Problems, load
from specgate.traceability.graph import trace

Judge = Callable[[str], Mapping[str, Assessment]]


@pytest.fixture
def judge(tmp_path: Path) -> Judge:
    """Return a function from the text of a project to the assessments of its requirements."""

    def judged(text: str) -> Mapping[str, Assessment]:
        path = tmp_path / "specgate.yaml"
        path.write_text(dedent(text))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return assess(project, analyse(project), trace(project))

    return judged
