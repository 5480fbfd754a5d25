"""One thing that a rule or the intake has to say."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.verdicts import Level

_WEIGHT = {Level.ERROR: 0, Level.WARNING: 1, Level.NOTE: 2}


@record
class Related:
    """Another place that a finding is about, with a few words on it."""

    place: Place
    message: str


@record
class Finding:
    """A message at a place: what is wrong, where, and what would put it right.

    `rule` is a descriptive slug of the contract (`requirement-orphan`, `unit-unknown` …). `restates` marks a
    finding that only repeats a verdict or a standing; such a finding never holds the gate by itself.
    """

    rule: str
    level: Level
    message: str
    place: Place
    requirement: str | None = None
    loop: str | None = None
    response: str | None = None
    subsystem: str | None = None
    related: tuple[Related, ...] = ()
    restates: bool = False


def with_use(finding: Finding) -> Finding:
    """Show the use of the template beside a finding in the text of one."""
    place = finding.place
    if place.template is None or place.via is None:
        return finding
    use = Related(place.via, f"the template `{place.template}` is used here")
    return finding if use in finding.related else replace(finding, related=(*finding.related, use))


def in_order(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Sort by file, line and column, then weight, rule and text; drop exact repetitions."""
    unique = dict.fromkeys(findings)
    return tuple(
        sorted(
            unique,
            key=lambda f: (f.place.path, f.place.line, f.place.column, _WEIGHT[f.level], f.rule, f.message),
        )
    )
