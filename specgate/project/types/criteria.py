"""Criteria: a measure of a subject with a limit, and what the claim that it is kept rests on."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from specgate.project.types.values import Value
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Limit:
    """at_most, at_least, between (low, high), within (distance, of) or equals (whole number, yes/no).

    values: in that order. A yes/no `equals` has truth instead. `points` marks per cent of the change.
    """

    kind: Literal["at_most", "at_least", "between", "within", "equals"]
    values: tuple[Value, ...]
    place: Place
    truth: bool | None = None


@record
class Band:
    """A settling band: per cent of the change, of a span or of a parameter, or a distance in the signal's unit."""

    value: Value
    of: Literal["change", "absolute"]


@record
class Subject:
    """What a criterion is about: `loop.name` of a response or break, or the loop (name None)."""

    kind: Literal["response", "break", "loop"]
    loop: str
    name: str | None
    place: Place

    @property
    def on(self) -> str:
        """The loop, or loop and response or break: `gate_position.follow`."""
        return self.loop if self.name is None else f"{self.loop}.{self.name}"


@record
class Claim:
    """A value claimed from an approximation; half a unit of its last printed digit is its tolerance."""

    value: Value
    digits: int
    """Exponent of ten of the last digit written (0.71 s: -2)."""


@record
class Basis:
    """What the claim of compliance rests on.

    chain: the approximations in the order in which they are used, the one that estimates the measure last. variant:
    which of its formulas, where the last has several.
    """

    kind: Literal["computed", "approximation", "evidence"]
    place: Place
    chain: tuple[str, ...] = ()
    claimed: Claim | None = None
    evidence: str | None = None
    variant: str | None = None


@record
class Corner:
    """A corner of a mask: a time or frequency, and the limit there."""

    at: Value
    limit: Value


@record
class MaskDefinition:
    """Limits over time or frequency between corners, in order; over None: as the unit of the corners tells.

    forever: the last limits go on past their last corners.
    """

    name: str
    over: Literal["time", "frequency"] | None
    upper: tuple[Corner, ...]
    lower: tuple[Corner, ...]
    forever: bool
    place: Place


@record
class Criterion:
    """A measure with a limit. `arguments` holds band, from, to, time, frequency … by their names.

    over: the range of frequencies that is looked at; None for all of them. mask: of `within_mask`.
    """

    subject: Subject
    measure: str
    arguments: Mapping[str, Value]
    limit: Limit
    place: Place
    basis: Basis | None = None
    evaluate: str | None = None
    kept: Mapping[str, object] = field(default_factory=dict)
    over: tuple[Value, Value] | None = None
    mask: MaskDefinition | None = None
