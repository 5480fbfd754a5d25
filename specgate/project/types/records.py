"""What stands beside requirements: records of tests and reviews, waivers, and how records are judged."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from flint import fmpq

from specgate.project.types.criteria import Criterion, Limit
from specgate.project.types.values import Value
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Aim:
    """Which criteria of a requirement something is about: those of a measure, on a loop, response or break.

    None: any. A requirement with one criterion needs neither.
    """

    measure: str | None = None
    on: str | None = None

    def hits(self, criterion: Criterion) -> bool:
        """Whether a criterion is one of those that are meant."""
        return self.measure in (None, criterion.measure) and self.on in (None, criterion.subject.on)


@record
class RecordFile:
    """The file of a record. digest: the sha256 that it is to have. found: that it has; None where it is not there."""

    path: str
    digest: str | None
    found: str | None
    place: Place


@record
class Evidence:
    """A record of a test, demonstration, inspection, analysis or review: numbers, or an outcome without any."""

    id: str
    kind: str
    requirements: tuple[str, ...]
    place: Place
    title: str | None = None
    date: str | None = None
    design_revision: str | None = None
    results: tuple[Value, ...] = ()
    outcome: Literal["meets", "does_not_meet"] | None = None
    expanded_uncertainty: Value | None = None
    aim: Aim = field(default_factory=Aim)
    file: RecordFile | None = None
    source: str | None = None
    chosen: Mapping[str, Criterion] = field(default_factory=dict)
    """By requirement, the only one of several criteria that the results can be of, where `aim` leaves it open."""

    def about(self, requirement: str, criterion: Criterion) -> bool:
        """Whether it is about a criterion of a requirement that it names."""
        only = self.chosen.get(requirement)
        return self.aim.hits(criterion) if only is None else criterion is only


@record
class Expiry:
    """When a waiver ends: after a day, or with a revision, which it no longer holds for."""

    date: str | None
    revision: str | None


@record
class Waiver:
    """An accepted departure: other limits, a standing, or an outcome without a number.

    kind: a deviation is granted before the requirement came under configuration control, a waiver after it.
    """

    id: str
    kind: Literal["waiver", "deviation"]
    requirements: tuple[str, ...]
    reason: str
    approved_by: str
    approved_on: str
    place: Place
    limits: tuple[Limit, ...] = ()
    standing: Literal["out_of_range", "inconclusive"] | None = None
    outcome: bool = False
    """Whether an outcome `does_not_meet` is accepted."""
    expires: Expiry | None = None
    scope: str | None = None
    aim: Aim = field(default_factory=Aim)
    accepts: Mapping[str, object] = field(default_factory=dict)
    """What is accepted, as written."""
    chosen: Mapping[str, Criterion] = field(default_factory=dict)
    """By requirement, the only one of several criteria that the limits can be for, where `aim` leaves it open."""

    def about(self, requirement: str, criterion: Criterion) -> bool:
        """Whether it is about a criterion of a requirement that it names."""
        only = self.chosen.get(requirement)
        return self.aim.hits(criterion) if only is None else criterion is only


@record
class DecisionRule:
    """How results are compared with limits (JCGM 106): by themselves, or guarded by a multiple of their uncertainty."""

    kind: Literal["simple_acceptance", "guarded_acceptance"] = "simple_acceptance"
    guard: fmpq = fmpq(0)


@record
class ModelAgreement:
    """How far a result may be from the computed value, beyond its uncertainty: relative (unit %) or absolute."""

    at_most: Value
    place: Place
