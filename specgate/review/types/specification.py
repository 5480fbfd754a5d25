"""What the files say, evaluated."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from specgate.review.types.fields import omitted
from specgate.review.types.values import Location
from specgate.terms.records import record


@record
class ParameterReview:
    """A parameter with its nominal value in coherent SI; in dB, and in units that hold pi, as it was written."""

    value: float
    exact: str | None
    """None for a formula that rests on pi."""
    unit: str
    as_written: str
    location: Location
    tolerance: Mapping[str, str] | None = None
    source: str | None = None


@record
class SubsystemReview:
    """A subsystem: its transfer function in coherent SI, and the parameters it reads."""

    title: str | None
    owner: str | None
    inputs: Mapping[str, str]
    outputs: Mapping[str, str]
    model: str
    """The form of the model in words."""
    numerators: Mapping[str, tuple[str, ...]]
    """By `output` or `output/input` where there are several."""
    numerator: tuple[str, ...]
    denominator: tuple[str, ...]
    reads: tuple[str, ...]
    used: bool
    location: Location
    realised: str | None = None
    by_fit: bool = False
    ranges: Mapping[str, str] | None = omitted()
    """Linear and rate ranges and spans of its ports, as written, by `port kind`."""
    dead_time: str | None = omitted()
    """Dead time in s, exact: a factor e^(-dead_time s) of every numerator. None for none."""
    model_claims: Mapping[str, str] | None = omitted()
    """What the project says of the model: `pedigree`, `valid_to`, `stands_for`, as written."""


@record
class SpecificationReview:
    """What the files say, evaluated."""

    parameters: Mapping[str, ParameterReview]
    subsystems: Mapping[str, SubsystemReview]
    documents: Mapping[str, Mapping[str, Any]]
