"""Printed values: places, amounts, results with their bounds and proofs."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Any

from specgate.review.types.fields import omitted
from specgate.terms.records import record


@record
class Location:
    """A place in an input file, counted from 1; `message` only on related places."""

    path: str
    line: int
    column: int
    message: str | None = omitted()


@record
class Amount:
    """A number with its unit; `exact` is a fraction, `as_written` the text of the file."""

    value: float | None
    unit: str
    exact: str | None = omitted()
    as_written: str | None = omitted()
    infinite: bool | None = omitted()


@record
class Beside:
    """What belongs to a value: where it is taken, and which way it is used up.

    frequency: rad/s. time: s. value, limit: of the first violation of a mask, in the signal's unit.
    direction: `up`, `down` (gain), `lag` or `lead` (phase).
    """

    frequency: Amount | None = omitted()
    time: Amount | None = omitted()
    value: Amount | None = omitted()
    limit: Amount | None = omitted()
    direction: str | None = omitted()


@record
class ProofPart:
    """How a number was proved, coherent SI; nothing in it depends on the processor."""

    method: str
    """What was searched, and why nothing was missed."""
    ground: str | None = omitted()
    """The kind of response or loop that it was searched in, and how its values are enclosed."""
    poles: int | None = omitted()
    pole_radius: float | None = omitted()
    """No pole lies further from the middle of its enclosure, 1/s; a power of ten, 0 where all are exact."""
    bits_of_modes: int | None = omitted()
    """Precision of the modes that the search started from."""
    brackets: int | None = omitted()
    """Intervals that hold what is searched, with one proved change of sign each."""
    searched_until: float | None = omitted()
    """Time (s) from which on a bound excludes what is searched, rounded up."""
    counts: Mapping[str, Any] | None = omitted()
    """What else was counted: degrees of polynomials, candidates, crossings; each by its name."""


@record
class ProofRecord(ProofPart):
    """How a bounded result was obtained, and the records of the numbers that it is made of."""

    bits: int | None = omitted()
    """Working precision at which all printed digits are settled; none of a yes or no."""
    parts: Mapping[str, ProofPart] | None = omitted()


@record
class Result:
    """A value as printed (12 significant digits) with its proved bounds, or the reason why there is none."""

    value: float | int | bool | None
    lower: float | None = omitted()
    upper: float | None = omitted()
    exact: str | None = omitted()
    unit: str | None = omitted()
    proof: str | None = omitted()
    reason: str | None = omitted()
    infinite: bool | None = omitted()
    fragile: str | None = field(default=None, metadata={"omit": True, "said_for": "settling_time"})
    """What a small change would do to the value. Said of every settling time in a list of measures, if only as null."""
    signed: float | None = omitted()
    at: Beside | None = omitted()
    proof_record: ProofRecord | None = omitted()
    """How a bounded result was obtained; only where the record was asked for."""


@record
class MeasureResult(Result):
    """A Result with the measure and the arguments it was read with."""

    measure: str = ""
    arguments: Mapping[str, str] | None = omitted()


@record
class Enclosure:
    """An enclosed number: rounded to 12 significant digits, and proved bounds (None where it is a whole number)."""

    value: float
    lower: float | None
    upper: float | None


@record
class Pole:
    """A certified pole: the true one lies within `radius` of what is printed, 1/s."""

    real: float
    imaginary: float
    multiplicity: int
    radius: float


@record
class DelayedTerm:
    """A polynomial (exact, highest power first) times e^(-delay s); the delay in s, exact."""

    delay: str
    coefficients: tuple[str, ...]
