"""Everything wrong in the input is collected, then sorted and said at once."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field

from specgate.project.types import InputFile
from specgate.terms.findings import Finding, Related, in_order
from specgate.terms.places import Place
from specgate.terms.verdicts import Level

MOST = 1000
"""Findings after which the rest is only counted: a file with more is not the file that was meant."""


@dataclass(frozen=True)
class Problems:
    """Why a project cannot be built: findings in order of their places, and the files that were read."""

    findings: tuple[Finding, ...]
    inputs: tuple[InputFile, ...]


@dataclass
class Collector:
    """Takes what is found on the way."""

    findings: list[Finding] = field(default_factory=list)
    left_out: int = 0
    topic: dict[str, str] = field(default_factory=dict)

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

    def add(self, finding: Finding) -> None:
        """Add a finding, unless there are far too many already."""
        if self.full:
            self.left_out += 1
        else:
            self.findings.append(finding)

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
        found = in_order(self.findings)
        if self.left_out:
            first = found[0]
            words = f"{self.left_out} more findings are left out: put these right first"
            found = (*found, Finding(first.rule, Level.ERROR, words, found[-1].place))
        return Problems(found, inputs)
