"""Projects from texts, without a disk."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fnmatch import fnmatchcase

import pytest

from specgate.intake.load import Problems, load_source
from specgate.project.types import Project
from specgate.terms.sources import SourceError

BENCH = """\
specgate: 1
project: {id: VB-1, title: Vent bench, revision: A, stage: CDR, stages: [PDR, CDR]}
parameters:
  travel: {value: 400 mm, source: "VB-DAT-1, table 2"}
subsystems:
  governor:
    input: {unit: mm}
    output: {unit: V}
    model: {pid: {form: parallel, proportional: 0.05 V/mm}}
  vent:
    parameters:
      lag: {value: 0.4 s, tolerance: 10 %, source: "VB-DAT-1, table 3"}
    input: {unit: V}
    output: {unit: mm}
    model: {gain: 30 mm/s/V, integrators: 1, lags: [lag]}
loops:
  opening:
    inputs: {demand: {unit: mm}, wind: {unit: mm}}
    signals:
      command: governor(demand - position)
      position: vent(command) + wind
    breaks: {main: position}
    responses:
      follow: {from: demand, to: position, input: step, size: 100 mm}
requirements:
  VB-1-01:
    text: The vent shall settle within 2 % in 3 s.
    verification: analysis
    criterion: {response: opening.follow, measure: settling_time, band: 2 %, at_most: 3 s}
    basis: computed
"""


@dataclass(frozen=True)
class Texts:
    """A source of files that are only texts."""

    files: Mapping[str, str]

    def read(self, path: str) -> bytes:
        if path not in self.files:
            raise SourceError(f"there is no file `{path}`")
        return self.files[path].encode()

    def glob(self, pattern: str) -> list[str]:
        return sorted(path for path in self.files if fnmatchcase(path, pattern))


Loader = Callable[..., "Project | Problems"]


@pytest.fixture
def bench() -> str:
    """A small project in which nothing is wrong."""
    return BENCH


@pytest.fixture
def load() -> Loader:
    """Read a project from the text of specgate.yaml and of other files, with `(old, new)` replaced in the former."""

    def read(text: str, *edits: tuple[str, str], files: Mapping[str, str] | None = None) -> Project | Problems:
        for old, new in edits:
            assert text.count(old) == 1, f"{old!r} stands {text.count(old)} times in the text"
            text = text.replace(old, new)
        return load_source(Texts({"specgate.yaml": text, **(files or {})}))

    return read


@pytest.fixture
def project(load: Loader) -> Callable[..., Project]:
    """Read a project that has to be free of faults."""

    def read(*arguments: object, **options: object) -> Project:
        found = load(*arguments, **options)
        assert isinstance(found, Project), [f"{f.place}: {f.message}" for f in found.findings]
        return found

    return read


@pytest.fixture
def said(load: Loader) -> Callable[..., list[str]]:
    """Return the findings on a project that has to have some, as `line:column rule: message`."""

    def read(*arguments: object, **options: object) -> list[str]:
        found = load(*arguments, **options)
        assert isinstance(found, Problems), "nothing was found"
        return [f"{f.place.line}:{f.place.column} {f.rule}: {f.message}" for f in found.findings]

    return read
