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
class Subsystem:
    """A block with inputs, outputs and a model.

    dead_time: beside any model, or alone (then the model is a gain of 1).
    kept: parts of the format that a later version answers (pedigree, valid_to, stands_for …), as written.
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
    kept: Mapping[str, object] = field(default_factory=dict)
