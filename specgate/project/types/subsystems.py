"""Subsystems: blocks with inputs, outputs and a model."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from specgate.project.types.models import Model
from specgate.project.types.values import Parameter, Value
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.units import Unit


@record
class Port:
    """One input or output of a subsystem."""

    name: str
    unit: Unit
    place: Place
    linear_range: tuple[Value, Value] | None = None
    rate_range: tuple[Value, Value] | None = None
    span: tuple[Value, Value] | None = None


@record
class Pedigree:
    """What kind of knowledge a model is, and the document or campaign that it comes from."""

    kind: Literal["identified", "physical_law", "data_sheet", "assumed"]
    source: str | None
    place: Place


@record
class StandIn:
    """That a continuous block represents something else.

    sampled: sampling period of what it stands for; None where that is not sampled. delay: its computation time, or
    the dead time. by: the approximation by which it does, as written.
    """

    sampled: Value | None
    delay: Value | None
    by: str | None
    place: Place


@record
class Subsystem:
    """A block with inputs, outputs and a model.

    dead_time: beside any model, or alone (then the model is a gain of 1).
    valid_to: angular frequency up to which the model holds.
    """

    name: str
    inputs: Mapping[str, Port]
    outputs: Mapping[str, Port]
    model: Model
    place: Place
    model_place: Place
    title: str | None = None
    owner: str | None = None
    realised: Literal["software", "hardware"] | None = None
    parameters: Mapping[str, Parameter] = field(default_factory=dict)
    dead_time: Value | None = None
    separate_instances: bool = False
    pedigree: Pedigree | None = None
    valid_to: Value | None = None
    stands_for: StandIn | None = None
