"""The whole specification: title block, policy, and all sections."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from specgate.project.types.criteria import MaskDefinition
from specgate.project.types.loops import Loop
from specgate.project.types.records import DecisionRule, Evidence, ModelAgreement, Waiver
from specgate.project.types.requirements import Requirement
from specgate.project.types.subsystems import Subsystem
from specgate.project.types.values import Parameter, Value
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.units import UnitTable


@record
class Kept:
    """A named entry of a section (documents, cases), as written."""

    id: str
    content: Mapping[str, object]
    place: Place


@record
class GatePolicy:
    """What holds the gate."""

    hold_on: tuple[Literal["non_compliant", "open", "out_of_range", "inconclusive"], ...]


@record
class ProjectInfo:
    """The title block."""

    id: str
    title: str
    revision: str
    date: str | None
    stage: str | None
    stages: tuple[str, ...]
    sign_off: tuple[str, ...]
    place: Place


@record
class InputFile:
    """A file that was read: path relative to the project folder, and the digest of its bytes."""

    path: str
    sha256: str


@record
class Wording:
    """Words in texts of requirements: further unverifiable ones, and listed ones that the project allows."""

    unverifiable: tuple[str, ...] = ()
    allowed: tuple[str, ...] = ()


@record
class Project:
    """The whole specification."""

    info: ProjectInfo
    parameters: Mapping[str, Parameter]
    """Global ones; those of a subsystem are in the subsystem."""
    subsystems: Mapping[str, Subsystem]
    loops: Mapping[str, Loop]
    requirements: Mapping[str, Requirement]
    gate: GatePolicy
    inputs: tuple[InputFile, ...]
    units: UnitTable
    units_read: tuple[str, ...]
    """Unit texts as written in the files, sorted, without repetition."""
    units_by_fit: tuple[str, ...] = ()
    """Where plain numbers carry whatever unit fits: subsystem names."""
    evaluate: str = "nominal"
    approximations: Mapping[str, Mapping[str, Value]] = field(default_factory=dict)
    """Project policy: thresholds of conditions, by approximation and key."""
    documents: Mapping[str, Kept] = field(default_factory=dict)
    evidence: Mapping[str, Evidence] = field(default_factory=dict)
    waivers: Mapping[str, Waiver] = field(default_factory=dict)
    wording: Wording = field(default_factory=Wording)
    decision_rule: DecisionRule = field(default_factory=DecisionRule)
    model_agreement: ModelAgreement | None = None
    masks: Mapping[str, MaskDefinition] = field(default_factory=dict)
    kept: Mapping[str, tuple[Kept, ...]] = field(default_factory=dict)
    """Sections answered later (cases), by name."""
    today: str | None = None
    """The day as which waivers are judged, where another than the date of the title block was asked for."""
    partial: bool = False
    """Something in it was reported: what could not be read is left out, and what refers to that says nothing."""
    warnings: tuple[object, ...] = ()
    """Findings of the intake below level error (specgate.terms.findings.Finding)."""

    @property
    def day(self) -> str | None:
        """The day as which waivers are judged; None where nobody said one."""
        return self.today or self.info.date
