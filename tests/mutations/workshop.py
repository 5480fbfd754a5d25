"""A project in memory to which single mutations are applied; what a mutation leaves as it was is computed once.

The analysis of a loop is a function of its declaration, of the subsystems that it applies, and of the values that both
read. Where all three are equal to those of the project as it stands, the same object is taken, and with it what has
been asked of it already. Everything else, from reading the files to the findings, is done anew for every mutation.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml

from specgate.analysis import analyse
from specgate.analysis.analyses import LoopAnalysis
from specgate.analysis.reads import read_by
from specgate.analysis.wiring import subsystems_of
from specgate.intake.load import Problems, load_source
from specgate.project.parameters import Values, values
from specgate.project.types import Loop, Project
from specgate.review import build
from specgate.review.types import FindingReview, Review
from specgate.review.wanted import Wanted
from specgate.revisions.compare import differences
from specgate.revisions.types import Differences
from specgate.terms.records import record
from specgate.terms.sources import HeldSource
from specgate.traceability.baseline import Baseline, frozen

EXAMPLES = Path(__file__).resolve().parents[2] / "example_projects"


@record
class Mutation:
    """One change of a file: the first `old` after the first `after` becomes `new`. expect: what must come of it."""

    name: str
    file: str
    after: str
    old: str
    new: str
    expect: tuple[str, ...]

    def applied(self, text: str) -> str:
        """Return the text of the file with the change in it; no line is moved."""
        start = text.index(self.after) if self.after else 0
        at = text.index(self.old, start)
        assert self.old.count("\n") == self.new.count("\n")
        return text[:at] + self.new + text[at + len(self.old) :]


def mutations(path: Path) -> tuple[Mutation, ...]:
    """Return the rows of a table."""
    rows = yaml.safe_load(path.read_text())
    return tuple(Mutation(**{**row, "expect": tuple(row.get("expect", ()))}) for row in rows)


def told(found: Differences | tuple[FindingReview, ...]) -> Iterator[str]:
    """Say what came of a mutation, a line each."""
    if isinstance(found, tuple):
        for one in found:
            yield f"unusable: {one.rule} at {one.location.path}:{one.location.line}"
        return
    for each in found.changes:
        yield " ".join(filter(None, (each.kind, each.name, each.what, each.how)))
    for one in found.requirements:
        because = f", because of {', '.join(one.because)}" if one.because else ""
        yield f"{one.id} is {one.judged}: {', '.join(one.changed)}{because}"
    for sign, findings in (("+", found.new_findings), ("-", found.gone_findings)):
        for finding in findings:
            about = finding.requirement or finding.subsystem or finding.loop or ""
            yield f"{sign} {finding.level} {finding.rule} {about}".rstrip()


class Workshop:
    """An example project with its review, and what mutations of it come to."""

    def __init__(self, example: str) -> None:
        root = EXAMPLES / example
        paths = sorted(root.rglob("*.yaml"))
        self.files = {str(path.relative_to(root)): path.read_text() for path in paths}
        self.known: list[tuple[Any, ...]] = []
        self.shared: dict[tuple[int, int], LoopAnalysis] = {}
        self.printed: dict[tuple[int, int], Any] = {}
        with pytest.MonkeyPatch.context() as patch:
            self._share(patch)
            project = self._load(self.files)
            assert isinstance(project, Project)
            self.review = self._review(project)
            self.baseline: Baseline = frozen(project, values(project))

    def mutated(self, mutation: Mutation) -> Differences | tuple[FindingReview, ...]:
        """Return the differences that a mutation makes, or why the project cannot be built any more."""
        files = {**self.files, mutation.file: mutation.applied(self.files[mutation.file])}
        with pytest.MonkeyPatch.context() as patch:
            self._share(patch)
            project = self._load(files)
            if isinstance(project, Problems):
                return build.unusable(project).findings
            review = self._review(project, self.baseline)
        return differences(self.review, review, self.review.tool)

    def _load(self, files: dict[str, str]) -> Project | Problems:
        return load_source(HeldSource({path: text.encode() for path, text in files.items()}))

    def _review(self, project: Project, baseline: Baseline | None = None) -> Review:
        return build.review(project, Wanted(drawn=False), baseline)

    def _share(self, patch: pytest.MonkeyPatch) -> None:
        analysed, joined, printed = analyse.loop_analysis, analyse._sharing, build.loop

        def once(project: Project, loop: Loop, built: Any, known: Values) -> LoopAnalysis:
            key = loop, *_read(project, loop, known)
            for before, found in self.known:
                if before == key:
                    return found  # type: ignore[no-any-return]
            found = analysed(project, loop, built, known)
            if len(self.known) < 2 * len(project.loops):
                self.known.append((key, found))
            return found

        def sharing(nominal: LoopAnalysis, again: LoopAnalysis) -> LoopAnalysis:
            if not (self._lasts(nominal) and self._lasts(again)):
                return joined(nominal, again)
            return self.shared.setdefault((id(nominal), id(again)), joined(nominal, again))

        def shown(found: LoopAnalysis, again: LoopAnalysis, *asked: Any) -> Any:
            pair = id(found), id(again)
            if pair in self.printed and self.printed[pair][0] == asked:
                return self.printed[pair][1]
            made = printed(found, again, *asked)
            if self._lasts(found) and self._lasts(again):
                self.printed.setdefault(pair, (asked, made))
            return made

        patch.setattr(analyse, "loop_analysis", once)
        patch.setattr(analyse, "_sharing", sharing)
        patch.setattr(build, "loop", shown)

    def _lasts(self, found: LoopAnalysis) -> bool:
        """Tell whether an analysis is one that is kept, so that its identity is its own for good."""
        kept = (*(each for _, each in self.known), *self.shared.values())
        return any(found is each for each in kept)


def _read(project: Project, loop: Loop, known: Values) -> tuple[Any, ...]:
    """Return the subsystems of a loop, and the values of all parameters that they and the loop read."""
    blocks = [project.subsystems[name] for name in subsystems_of(project, loop)]
    names = [*read_by(loop, None, known), *(name for one in blocks for name in read_by(one, one.name, known))]
    return blocks, {name: known.numbers.get(name) for name in names}, known.pi
