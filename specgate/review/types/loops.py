"""Loops as solved, with their responses and breaks."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field

from specgate.review.types.fields import omitted
from specgate.review.types.formulas import FormulasReview
from specgate.review.types.values import Amount, DelayedTerm, Enclosure, MeasureResult, Pole
from specgate.terms.records import record


@record
class Curve:
    """Points of a response, seconds against the signal's unit (deviation from rest), 6 digits."""

    time: tuple[float, ...]
    value: tuple[float, ...]


@record
class ResponseReview:
    """A response: what drives it, its transfer function (exact, highest power first) and all its measures."""

    from_: str = field(metadata={"json": "from"})
    to: str
    input: Mapping[str, str]
    unit: str
    numerator: tuple[str, ...]
    denominator: tuple[str, ...]
    measures: tuple[MeasureResult, ...]
    poles: tuple[Pole, ...] = ()
    zeros: tuple[Pole, ...] = ()
    curve: Curve | None = None
    numerator_terms: tuple[DelayedTerm, ...] | None = omitted()
    """With dead time, in place of the numerator: a sum of terms."""
    denominator_terms: tuple[DelayedTerm, ...] | None = omitted()
    formulas: FormulasReview | None = omitted()
    """Every formula of the catalogue against this response; only where that was asked for."""
    reason: str | None = omitted()
    """Why there is no response (improper, not answered yet)."""


@record
class InZ:
    """What is said of a sampled loop in z: its period in s (exact), and polynomials that are not rational.

    Coefficients highest power of z first. Those that are rational stand where those in s of other loops do.
    """

    period: str
    characteristic_polynomial: tuple[Enclosure, ...] | None = omitted()
    numerator: tuple[Enclosure, ...] | None = omitted()
    denominator: tuple[Enclosure, ...] | None = omitted()


@record
class CrossingReview:
    """Where the open loop passes the unit circle (`gain`) or the negative real axis (`phase`), and what is left there.

    margin: a phase (deg) or a factor of the gain (dB), used up in `direction`.
    """

    kind: str
    frequency: Amount
    margin: Amount
    direction: str


@record
class FrequencyCurve:
    """Points of an opened loop for drawing: rad/s, dB, and deg followed from zero frequency; 6 digits."""

    frequency: tuple[float, ...]
    gain_db: tuple[float, ...]
    phase_deg: tuple[float, ...]


@record
class BreakReview:
    """A loop opened at a break."""

    at: str
    measures: tuple[MeasureResult, ...]
    numerator: tuple[str, ...] = ()
    denominator: tuple[str, ...] = ()
    crossings: tuple[CrossingReview, ...] = ()
    in_z: InZ | None = omitted()
    """Of a sampled loop: numerator and denominator are in z."""
    numerator_terms: tuple[DelayedTerm, ...] | None = omitted()
    denominator_terms: tuple[DelayedTerm, ...] | None = omitted()
    frequency_response: FrequencyCurve | None = None
    formulas: FormulasReview | None = omitted()
    reason: str | None = omitted()


@record
class HiddenMode:
    """A mode of the loop that a response does not show."""

    response: str
    polynomial: tuple[str, ...]
    stable: bool
    poles: tuple[Pole, ...] = ()
    terms: tuple[DelayedTerm, ...] | None = omitted()
    """With dead time, in place of the polynomial."""


@record
class LoopReview:
    """A loop, solved."""

    title: str | None
    wiring: Mapping[str, str]
    inputs: Mapping[str, str]
    """Units of the outside inputs, by name."""
    signal_units: Mapping[str, str]
    rest: Mapping[str, str]
    subsystems: tuple[str, ...]
    characteristic_polynomial: tuple[str, ...]
    poles: tuple[Pole, ...]
    hidden_modes: tuple[HiddenMode, ...]
    measures: tuple[MeasureResult, ...]
    responses: Mapping[str, ResponseReview]
    breaks: Mapping[str, BreakReview]
    in_z: InZ | None = omitted()
    """Of a sampled loop: characteristic polynomial and poles are in z."""
    characteristic_terms: tuple[DelayedTerm, ...] | None = omitted()
    """With dead time, in place of the characteristic polynomial: a sum of terms."""
    formulas: FormulasReview | None = omitted()
    reason: str | None = omitted()
    """Why the loop could not be solved (an algebraic loop)."""
