"""Projects from YAML texts, read as a user's file is."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from textwrap import dedent

import pytest

from specgate.intake.load import Problems, load_source
from specgate.project.types import Project
from specgate.terms.findings import Finding
from specgate.terms.sources import SourceError

HEADER = """\
specgate: 1
project: {id: T-1, title: A trial, revision: A, units: {count: 1/65536 rev}}
"""


@dataclass(frozen=True)
class TextSource:
    """Files held in memory."""

    files: Mapping[str, str]

    def read(self, path: str) -> bytes:
        if path not in self.files:
            raise SourceError(f"there is no file `{path}`")
        return self.files[path].encode()

    def glob(self, pattern: str) -> list[str]:
        return sorted(name for name in self.files if name == pattern)


def _load(text: str) -> Project | Problems:
    return load_source(TextSource({"specgate.yaml": HEADER + dedent(text)}))


@pytest.fixture
def project() -> Callable[[str], Project]:
    """Read a text that has to be a good project."""

    def read(text: str) -> Project:
        loaded = _load(text)
        assert isinstance(loaded, Project), [f"{f.place} {f.message}" for f in loaded.findings]
        return loaded

    return read


@pytest.fixture
def findings() -> Callable[[str], tuple[Finding, ...]]:
    """Read a text and return what is wrong with it."""

    def read(text: str) -> tuple[Finding, ...]:
        loaded = _load(text)
        return loaded.findings if isinstance(loaded, Problems) else ()

    return read


@pytest.fixture
def one_block(project: Callable[[str], Project]) -> Callable[..., Project]:
    """Read a project with one subsystem `block` of the given model and ports."""

    def read(
        model: str, source: str = "1", target: str = "1", parameters: str = "{}", inputs: str = "", rest: str = ""
    ) -> Project:
        ports = inputs or f'input: {{unit: "{source}"}}'
        return project(
            f"""
            subsystems:
              block:
                parameters: {parameters}
                {ports}
                output: {{unit: "{target}"}}
                model: {model}
                {rest}
            """
        )

    return read
