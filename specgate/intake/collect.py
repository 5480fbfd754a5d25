"""Everything wrong in the input is collected, then sorted and said at once."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field

from specgate.intake.nodes import Spot
from specgate.project.types import InputFile
from specgate.terms.findings import Finding, Related, in_order, with_use
from specgate.terms.names import nearest
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.verdicts import Level

MOST = 300
"""Findings after which no more are taken: a file with more is not the file that was meant."""
MOST_COMPARISONS = 20_000
"""Known names that unknown ones are compared with, in all: enough for every misspelling that a person makes."""


@record
class Problems:
    """Why a project cannot be built: findings in order of their places, and the files that were read."""

    findings: tuple[Finding, ...]
    inputs: tuple[InputFile, ...]


@dataclass
class Collector:
    """Takes what is found on the way."""

    findings: list[Finding] = field(default_factory=list)
    topic: dict[str, str] = field(default_factory=dict)
    misshapen: set[tuple[str | int, ...]] = field(default_factory=set)
    """Paths (`loops`, name, `responses` …) of what is not of the shape that others rely on, and of what holds it."""
    unreadable: set[Spot] = field(default_factory=set)
    """Where values stand that were reported, or that a comma inside braces has cut."""
    comparisons: int = MOST_COMPARISONS

    def error(self, rule: str, message: str, place: Place, *related: Related, **about: str) -> None:
        """Add an error; `about` may name the requirement, loop, response or subsystem that it is about."""
        named: dict[str, str] = {**self.topic, **about}
        self.add(Finding(rule, Level.ERROR, message, place, related=related, **named))  # type: ignore[arg-type]

    @contextmanager
    def about(self, **topic: str) -> Iterator[None]:
        """Run the body with findings that are about this requirement, loop or subsystem."""
        before, self.topic = self.topic, topic
        try:
            yield
        finally:
            self.topic = before

    def shapely(self, *path: str | int) -> bool:
        """Whether what stands at a path is of the shape that others rely on."""
        return path not in self.misshapen

    def add(self, finding: Finding) -> None:
        """Add a finding, unless there are far too many already."""
        if not self.full:
            self.findings.append(finding)

    def nearest(self, word: str, known: Iterable[str]) -> str | None:
        """Return the known name that `word` was most likely meant to be, or None; after very many, always None."""
        names = tuple(known)
        if self.comparisons < len(names):
            return None
        self.comparisons -= len(names)
        return nearest(word, names)

    @property
    def full(self) -> bool:
        """Whether more findings would help nobody."""
        return len(self.findings) >= MOST

    @property
    def failed(self) -> bool:
        """Whether anything was found that keeps the project from being built."""
        return any(finding.level is Level.ERROR for finding in self.findings)

    def problems(self, inputs: tuple[InputFile, ...]) -> Problems:
        """Return what was found, in order."""
        found = in_order(map(with_use, self.findings))
        if self.full:
            words = f"only the first {MOST} findings are shown: put these right first"
            found = (*found, Finding(found[-1].rule, Level.ERROR, words, found[-1].place))
        return Problems(found, inputs)
