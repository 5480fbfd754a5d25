"""Requirements of any level, with their verification and their links."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from specgate.project.types.budgets import Budget
from specgate.project.types.criteria import Basis, Criterion
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Method:
    """A verification method, due at a stage (None: due now)."""

    method: str
    place: Place
    stage: str | None = None


@record
class Link:
    """A link to what a requirement is derived from."""

    id: str
    place: Place
    kept: Mapping[str, object] = field(default_factory=dict)


@record
class NotApplicable:
    """Why a requirement does not apply, and who said so."""

    reason: str
    approved_by: str | None
    approved_on: str | None


@record
class Requirement:
    """A requirement of any level."""

    id: str
    text: str
    place: Place
    title: str | None = None
    rationale: str | None = None
    owner: str | None = None
    derived_from: tuple[Link, ...] = ()
    allocated_to: tuple[Link, ...] = ()
    verification: tuple[Method, ...] = ()
    criteria: tuple[Criterion, ...] = ()
    basis: Basis | None = None
    decided_by: Literal["criteria", "derived", "evidence"] = "criteria"
    coverage_complete: bool = False
    coverage: Mapping[str, object] = field(default_factory=dict)
    external: Mapping[str, object] | None = None
    not_applicable: NotApplicable | None = None
    budget: Budget | None = None
    kept: Mapping[str, object] = field(default_factory=dict)
    text_place: Place | None = None
    template_place: Place | None = None
    """Where the text of the template begins that it is made from."""
