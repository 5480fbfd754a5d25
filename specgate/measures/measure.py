"""The shape of a row of the measure table."""

from __future__ import annotations

from collections.abc import Callable
from enum import Enum
from typing import Any, Literal

from flint import fmpq

from specgate.measures.inputs import INPUTS
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.terms.records import record


class UnitRule(Enum):
    """In what a measure is counted; `read` answers in coherent SI, ratios plain (not per cent, not dB)."""

    SECOND = "s"
    SIGNAL = "the signal's unit"
    CHANGE = "% of the change, or the signal's unit"
    SIGNAL_RATE = "the signal's unit per second"
    SIGNAL_SECOND = "the signal's unit times second"
    SIGNAL_SQUARED_SECOND = "the signal's unit squared times second"
    COUNT = "whole number"
    RATIO = "1"
    DECIBEL = "dB"
    DEGREE = "deg"
    RADIAN_PER_SECOND = "rad/s"
    PER_SECOND = "1/s"
    PER_SECOND_SQUARED = "1/s^2"
    YES_NO = "yes/no"


_SIDED = (UnitRule.SIGNAL, UnitRule.RATIO, UnitRule.PER_SECOND, UnitRule.PER_SECOND_SQUARED)

SubjectKind = Literal["response", "break", "loop"]
ArgumentKind = Literal["band", "fraction", "time", "frequency", "mask", "range"]


@record
class Argument:
    """An argument of a measure as it is named in a criterion."""

    name: str
    kind: ArgumentKind
    text: str
    required: bool = False


@record
class Band:
    """A settling band: a fraction of the change, or a distance in the signal's unit (SI)."""

    size: fmpq
    relative: bool


@record
class Arguments:
    """Evaluated arguments. lower, upper: fractions of the change between which rise time counts.

    absolute: overshoot and undershoot are asked for in the signal's unit instead of as a fraction of the change.
    time: of `value_at` and `deviation_after`, seconds from the start of the input.
    frequency, over: angular, rad/s. mask: the limits of `within_mask`; relative: they are parts of the change,
        laid_over: what they are laid over.
    measure: name of the measure that is asked for; set wherever approximations are evaluated, because several of
        them estimate more than one.
    """

    band: Band | None = None
    lower: fmpq = fmpq(1, 10)
    upper: fmpq = fmpq(9, 10)
    absolute: bool = False
    time: fmpq | None = None
    frequency: fmpq | None = None
    over: tuple[fmpq, fmpq] | None = None
    mask: Mask | None = None
    relative: bool = False
    laid_over: Literal["time", "frequency"] = "time"
    measure: str = ""


Reader = Callable[[Any, Arguments], Answer]
"""`read(subject, arguments)`; the subject is of the row's subject kinds (specgate.measures.subjects)."""

Comparer = Callable[[Any, Arguments, fmpq], Literal[-1, 0, 1] | None]
"""`at_limit(subject, arguments, limit)`: exact sign of measure minus limit (SI), or None where undecided."""


@record
class Measure:
    """One row: what is read off which subject, and how.

    definition: the user's text. source: the standard's term it follows, or where it is fixed.
    absent_when: when there is no value. signed: may be of either sign (see `sign-ambiguous-limit`).
    read is None for a measure that this version does not answer yet.
    beside: a second value printed next to the first (the signed value of a magnitude).
    example: how it is written in YAML, where the arguments alone do not show that.
    always: reported on every step response (or break, or loop), asked for or not.
    of_error: read from reference minus response, so that there has to be a reference of the same dimension.
    inputs: of a response: the kinds of input for which it exists, as far as the input alone tells.
    """

    name: str
    title: str
    subjects: tuple[SubjectKind, ...]
    unit: UnitRule
    definition: str
    absent_when: str
    source: str
    method: str
    read: Reader | None = None
    at_limit: Comparer | None = None
    beside: Reader | None = None
    arguments: tuple[Argument, ...] = ()
    example: str = ""
    signed: bool = False
    always: bool = False
    of_error: bool = False
    inputs: tuple[str, ...] = INPUTS

    @property
    def sided(self) -> bool:
        """Whether a one-sided limit has a right and a wrong sign; decibels and phases have none."""
        return self.signed and self.unit in _SIDED
