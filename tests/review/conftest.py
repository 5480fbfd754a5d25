"""From YAML to a Review, for the tests of this room."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from textwrap import dedent

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review

Reviewed = Callable[[str], Review]


@pytest.fixture
def reviewed(tmp_path: Path) -> Reviewed:
    """Return a function from the text of a project to its Review."""

    def make(text: str) -> Review:
        path = tmp_path / "specgate.yaml"
        path.write_text(dedent(text))
        project = load(path)
        assert not isinstance(project, Problems), [one.message for one in project.findings]
        return review(project)

    return make
