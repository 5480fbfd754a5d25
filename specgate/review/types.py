"""The Review: what a run found, in plain values; a mirror of the results format, key for key.

Every field is named as in `schemas/results.schema.json`, so that the machine-readable result is this tree written
out and read back (`exchange.json`). Reports and differences need nothing beside it. Field metadata: `json` where
the key is a Python keyword or otherwise differs (`from_` is written `from`); fields that are None and whose
metadata says `omit` are left out, except in the record of the measure named by `said_for`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Any

from specgate.terms.records import record


def _omitted(key: str | None = None) -> Any:
    return field(default=None, metadata={"omit": True} if key is None else {"omit": True, "json": key})


@record
class Location:
    """A place in an input file, counted from 1; `message` only on related places."""

    path: str
    line: int
    column: int
    message: str | None = _omitted()


@record
class Amount:
    """A number with its unit; `exact` is a fraction, `as_written` the text of the file."""

    value: float | None
    unit: str
    exact: str | None = _omitted()
    as_written: str | None = _omitted()
    infinite: bool | None = _omitted()


@record
class Beside:
    """What belongs to a value: where it is taken, and which way it is used up.

    frequency: rad/s. time: s. value, limit: of the first violation of a mask, in the signal's unit.
    direction: `up`, `down` (gain), `lag` or `lead` (phase).
    """

    frequency: Amount | None = _omitted()
    time: Amount | None = _omitted()
    value: Amount | None = _omitted()
    limit: Amount | None = _omitted()
    direction: str | None = _omitted()


@record
class ProofPart:
    """How a number was proved, coherent SI; nothing in it depends on the processor."""

    method: str
    poles: int | None = _omitted()
    pole_radius: float | None = _omitted()
    """No pole lies further from the middle of its enclosure, 1/s; a power of ten, 0 where all are exact."""
    bits_of_modes: int | None = _omitted()
    """Precision of the modes that the search started from."""
    brackets: int | None = _omitted()
    """Intervals that hold what is searched, with one proved change of sign each."""
    searched_until: float | None = _omitted()
    """Time (s) from which on a bound excludes what is searched, rounded up."""
    counts: Mapping[str, Any] | None = _omitted()
    """What else was counted: degrees of polynomials, candidates, crossings; each by its name."""


@record
class ProofRecord(ProofPart):
    """How a bounded result was obtained, and the records of the numbers that it is made of."""

    bits: int = 0
    """Working precision at which all printed digits are settled."""
    parts: Mapping[str, ProofPart] | None = _omitted()


@record
class Result:
    """A value as printed (12 significant digits) with its proved bounds, or the reason why there is none."""

    value: float | int | bool | None
    lower: float | None = _omitted()
    upper: float | None = _omitted()
    exact: str | None = _omitted()
    unit: str | None = _omitted()
    proof: str | None = _omitted()
    reason: str | None = _omitted()
    infinite: bool | None = _omitted()
    fragile: str | None = field(default=None, metadata={"omit": True, "said_for": "settling_time"})
    """What a small change would do to the value. Said of every settling time in a list of measures, if only as null."""
    signed: float | None = _omitted()
    at: Beside | None = _omitted()
    proof_record: ProofRecord | None = _omitted()
    """How a bounded result was obtained; only where the record was asked for."""


@record
class MeasureResult(Result):
    """A Result with the measure and the arguments it was read with."""

    measure: str = ""
    arguments: Mapping[str, str] | None = _omitted()


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
    numerator_terms: tuple[DelayedTerm, ...] | None = _omitted()
    """With dead time, in place of the numerator: a sum of terms."""
    denominator_terms: tuple[DelayedTerm, ...] | None = _omitted()
    reason: str | None = _omitted()
    """Why there is no response (improper, not answered yet)."""


@record
class Enclosure:
    """An enclosed number: rounded to 12 significant digits, and proved bounds (None where it is a whole number)."""

    value: float
    lower: float | None
    upper: float | None


@record
class InZ:
    """What is said of a sampled loop in z: its period in s (exact), and polynomials that are not rational.

    Coefficients highest power of z first. Those that are rational stand where those in s of other loops do.
    """

    period: str
    characteristic_polynomial: tuple[Enclosure, ...] | None = _omitted()
    numerator: tuple[Enclosure, ...] | None = _omitted()
    denominator: tuple[Enclosure, ...] | None = _omitted()


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
    in_z: InZ | None = _omitted()
    """Of a sampled loop: numerator and denominator are in z."""
    numerator_terms: tuple[DelayedTerm, ...] | None = _omitted()
    denominator_terms: tuple[DelayedTerm, ...] | None = _omitted()
    frequency_response: FrequencyCurve | None = None
    reason: str | None = _omitted()


@record
class HiddenMode:
    """A mode of the loop that a response does not show."""

    response: str
    polynomial: tuple[str, ...]
    stable: bool
    poles: tuple[Pole, ...] = ()
    terms: tuple[DelayedTerm, ...] | None = _omitted()
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
    in_z: InZ | None = _omitted()
    """Of a sampled loop: characteristic polynomial and poles are in z."""
    characteristic_terms: tuple[DelayedTerm, ...] | None = _omitted()
    """With dead time, in place of the characteristic polynomial: a sum of terms."""
    reason: str | None = _omitted()
    """Why the loop could not be solved (an algebraic loop)."""


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


@record
class SpecificationReview:
    """What the files say, evaluated."""

    parameters: Mapping[str, ParameterReview]
    subsystems: Mapping[str, SubsystemReview]
    documents: Mapping[str, Mapping[str, Any]]


@record
class ConditionReview:
    """A condition of an approximation: what it requires, what was found, whether it holds (None: undecided)."""

    key: str
    name: str
    source: str
    required: str
    found: float | str | None
    holds: bool | None
    approximation: str = ""
    policy: str | None = _omitted()
    """Set where the project changed the threshold."""


@record
class ErrorReview:
    """Signed error of a formula against the proved value; side is safe, unsafe or none."""

    relative: float | None
    side: str
    absolute: Amount | None = _omitted()


@record
class InsteadReview:
    """What to use instead of an approximation that does not stand."""

    name: str
    value: float | None
    unit: str
    variant: str | None = _omitted()
    """Which of its formulas, where it has several."""


@record
class PointReview:
    """Where a response stands in a picture: its damping ratio and the error of the formula on it."""

    damping: float
    error: float | None


@record
class ErrorCurveReview:
    """The error of a formula (formula / true - 1) for the pair alone, over the damping ratio of the pair.

    lower, upper: damping ratios between which the formula's own conditions hold.
    """

    damping: tuple[float, ...]
    error: tuple[float, ...]
    lower: float | None
    upper: float | None
    here: PointReview


@record
class SeparationReview:
    """Poles and zeros about the dominant pair at real ± imaginary j (1/s), and how far from it they have to be.

    real_part: other poles have to lie left of it. distance: zeros (other poles too, if `poles_too`) have to lie at
    least so far from the origin.
    """

    real: float
    imaginary: float
    poles: tuple[Pole, ...]
    zeros: tuple[Pole, ...]
    real_part: float | None
    distance: float | None
    poles_too: bool


@record
class BasisReview:
    """The audit of a basis. For `computed` and `evidence` only kind and standing are set."""

    kind: str
    standing: str
    chain: tuple[str, ...] = ()
    """The approximations that it rests on: premises first, the one that estimates the measure last."""
    claimed: Amount | None = None
    formula: Amount | None = None
    formula_text: str | None = None
    error: ErrorReview | None = None
    claim_agrees: bool | None = None
    implied: Mapping[str, float] | None = None
    """What the stated accuracy leaves for the true value: lower, and upper if there is an end (unit of the claim)."""
    accuracy: str | None = None
    conditions: tuple[ConditionReview, ...] = ()
    instead: InsteadReview | None = None
    reason: str | None = _omitted()
    variant: str | None = _omitted()
    """Which formula of the last of the chain, where it has several."""
    error_curve: ErrorCurveReview | None = _omitted()
    separation: SeparationReview | None = _omitted()


@record
class LimitReview:
    """A limit: exactly one of the keys is set."""

    at_most: Amount | None = _omitted()
    at_least: Amount | None = _omitted()
    between: tuple[Amount, Amount] | None = _omitted()
    within: Amount | None = _omitted()
    of: Amount | None = _omitted()
    equals: bool | int | None = _omitted()


@record
class ReserveReview:
    """Distance to the limit, positive inside, in the limit's unit."""

    value: float | None
    unit: str
    relative: float | None = None
    infinite: bool | None = _omitted()


@record
class MaskReview:
    """Limits along a mask for drawing, 6 digits: corners as (s or rad/s, value), two at one place a jump.

    over: `time` or `frequency`. unit: of the values; % is of the change. forever: the last values go on.
    """

    over: str
    unit: str
    upper: tuple[tuple[float, float], ...]
    lower: tuple[tuple[float, float], ...]
    forever: bool


@record
class CriterionReview:
    """One limit of a requirement: what was found, the verdict, the audit."""

    measure: str
    on: str
    arguments: Mapping[str, str]
    limit: LimitReview
    evaluate: str
    verdict: str
    result: Result
    reserve: ReserveReview | None
    basis: BasisReview
    standing: str
    """The worst of the standing of the basis and of the ranges that the response rests on."""
    location: Location
    mask: MaskReview | None = _omitted()
    reason: str | None = _omitted()


@record
class MethodReview:
    """A verification method and how it stands: a verdict, `due_later`, or `no_record`."""

    method: str
    stage: str | None
    outcome: str


@record
class AssumptionReview:
    """A range that the verdict rests on: where, how far the response goes from rest, how far it may."""

    kind: str
    """`linear_range` or `rate_range`."""
    response: str
    signal: str | None
    """The signal of the loop that the port carries; None for one without a name."""
    subsystem: str
    side: str
    port: str
    rest: Amount
    low: Amount
    high: Amount
    peak: Result | None
    """Greatest distance from rest, or greatest rate; None where a bound alone was taken (only the text output)."""
    allowed: Amount
    """From rest to the nearer end; negative where rest is outside."""
    holds: bool | None
    largest_size: Amount | None
    """The largest size of the input that keeps the range, rounded down; None where it has no one size."""
    largest_factor: float | None
    reason: str | None = _omitted()
    """Why there is no peak, or why the question is open."""


@record
class RequirementReview:
    """A requirement with its verdict. Verdict is `not_applicable` where it does not apply."""

    text: str
    title: str | None
    rationale: str | None
    owner: str | None
    location: Location
    derived_from: tuple[str, ...]
    allocated_to: tuple[str, ...]
    verdict: str
    standing: str | None
    decided_by: str
    methods: tuple[MethodReview, ...]
    criteria: tuple[CriterionReview, ...]
    assumptions: tuple[AssumptionReview, ...] = ()
    rests_on: tuple[str, ...] = ()
    derived: tuple[str, ...] = ()
    """Ids of the requirements derived from it."""
    evidence: tuple[Mapping[str, Any], ...] = ()
    waiver: Mapping[str, Any] | None = None
    reason: str | None = None
    """Why it is not compliant, in one sentence."""
    not_applicable: Mapping[str, Any] | None = None
    external: Mapping[str, Any] | None = None


@record
class FindingReview:
    """A finding as printed."""

    rule: str
    level: str
    message: str
    location: Location
    requirement: str | None = _omitted()
    loop: str | None = _omitted()
    response: str | None = _omitted()
    subsystem: str | None = _omitted()
    related: tuple[Location, ...] = ()


@record
class GateReview:
    """Outcome (`pass`, `hold`, `unusable`) and, one sentence each, what holds it."""

    outcome: str
    reasons: tuple[str, ...]


@record
class ToolReview:
    """Which program made the result."""

    name: str
    version: str


@record
class InputReview:
    """A file that was read and the digest of its bytes."""

    path: str
    sha256: str


@record
class ProjectReview:
    """Title block."""

    id: str
    title: str
    revision: str
    date: str | None
    stage: str | None
    stages: tuple[str, ...]
    sign_off: tuple[str, ...]


@record
class PolicyReview:
    """What holds the gate, how results are evaluated, thresholds that the project changed."""

    hold_on: tuple[str, ...]
    evaluate: str
    changed_thresholds: tuple[Mapping[str, Any], ...] = ()


@record
class DefinitionReview:
    """The text that `explain` prints, of every measure, approximation and rule that was used."""

    kind: str
    title: str
    text: str
    source: str | None = None


@record
class Review:
    """The whole result of a run on a project that could be built."""

    format: int
    tool: ToolReview
    project: ProjectReview
    inputs: tuple[InputReview, ...]
    policy: PolicyReview
    units: tuple[str, ...]
    specification: SpecificationReview
    loops: Mapping[str, LoopReview]
    requirements: Mapping[str, RequirementReview]
    trace: Mapping[str, tuple[str, ...]]
    definitions: Mapping[str, DefinitionReview]
    findings: tuple[FindingReview, ...]
    gate: GateReview


@record
class Unusable:
    """The result of a run on a project that could not be built."""

    format: int
    tool: ToolReview
    inputs: tuple[InputReview, ...]
    findings: tuple[FindingReview, ...]
    gate: GateReview
