"""The specification as it stands in the files: typed, frozen, every number still an expression.

Nothing here is evaluated: `specgate.project.instantiate` gives the loops for given values.
Mappings keep the order of the files. Absent optional parts are None or empty.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import field
from typing import Literal

from specgate.terms.expressions import Expression
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.units import Unit, UnitTable


@record
class Value:
    """An expression wherever a quantity may stand, with where it comes from.

    as_written: the text of the file. source, tolerance: only where `{value, source, tolerance}` was written.
    """

    expression: Expression
    as_written: str
    place: Place
    source: str | None = None
    tolerance: Tolerance | None = None


@record
class Tolerance:
    """Deviations from the nominal value, each relative (unit %) or absolute; lower is <= 0 <= upper."""

    lower: Expression
    upper: Expression
    relative: bool
    as_written: str
    distribution: Literal["uniform", "triangular", "normal"] | None = None
    coverage_factor: Expression | None = None


@record
class Parameter:
    """A named value, global (`stroke`) or of a subsystem (`hoist_drive.lag`); `name` is the qualified name."""

    name: str
    value: Value
    formula: bool
    place: Place
    title: str | None = None


@record
class Port:
    """One input or output of a subsystem."""

    name: str
    unit: Unit
    place: Place
    linear_range: tuple[Value, Value] | None = None
    rate_range: tuple[Value, Value] | None = None
    span: tuple[Value, Value] | None = None


# --- models of a subsystem -------------------------------------------------------------------------------

Polynomial = tuple[Value, ...]
"""Coefficients, highest power first."""


@record
class PolynomialModel:
    """numerator / denominator in s; also a differential equation (output = denominator side)."""

    numerator: Polynomial
    denominator: Polynomial
    written_as: Literal["polynomials", "equation"] = "polynomials"


@record
class Pair:
    """A second-order factor s^2/wn^2 + 2*zeta*s/wn + 1."""

    natural_frequency: Value
    damping: Value


@record
class FactoredModel:
    """gain * s^differentiators / s^integrators * product of (1+Ts) and pairs."""

    gain: Value
    integrators: int = 0
    differentiators: int = 0
    lags: tuple[Value, ...] = ()
    leads: tuple[Value, ...] = ()
    pairs: tuple[Pair, ...] = ()
    zero_pairs: tuple[Pair, ...] = ()


@record
class Root:
    """A real pole or zero (imaginary None) or a conjugate pair, in 1/s."""

    real: Value
    imaginary: Value | None = None


@record
class PoleZeroModel:
    """leading_coefficient * product of (s - zero) / product of (s - pole)."""

    poles: tuple[Root, ...]
    zeros: tuple[Root, ...]
    leading_coefficient: Value


Matrix = tuple[tuple[Value, ...], ...]


@record
class StateSpaceModel:
    """x' = A x + B u, y = C x + D u; rows and columns in the order of states, inputs, outputs."""

    states: tuple[str, ...]
    a: Matrix
    b: Matrix
    c: Matrix
    d: Matrix


@record
class PidModel:
    """A controller; `terms` holds the values that were given under the names of the format."""

    form: Literal["parallel", "standard", "series"]
    terms: Mapping[str, Value]
    derivative_on: Literal["error", "measurement"] = "error"


@record
class MatrixModel:
    """Several inputs or outputs over one denominator: numerators[(output, input)]."""

    numerators: Mapping[tuple[str, str], Polynomial]
    denominator: Polynomial


@record
class SampledModel:
    """A controller in z (validated and kept; answered by a later version)."""

    period: Value
    numerator: Polynomial = ()
    denominator: Polynomial = ()
    pid: PidModel | None = None
    rule: str | None = None
    delay: Value | None = None
    reconstruction: str = "zero_order"


Model = PolynomialModel | FactoredModel | PoleZeroModel | StateSpaceModel | PidModel | MatrixModel | SampledModel


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


# --- loops -----------------------------------------------------------------------------------------------


@record
class SignalName:
    """A loop input or signal inside a signal expression."""

    name: str
    place: Place


@record
class Call:
    """A subsystem applied to arguments, by position (one input) or by name; `output` where it has several."""

    subsystem: str
    arguments: Mapping[str, SignalExpression]
    output: str
    place: Place


@record
class Scaled:
    """A constant times a signal expression."""

    factor: Expression
    operand: SignalExpression
    place: Place


@record
class Sum:
    """A sum; signs are in the terms (Scaled by -1)."""

    terms: tuple[SignalExpression, ...]
    place: Place


SignalExpression = SignalName | Call | Scaled | Sum


@record
class LoopInput:
    """An outside input of a loop."""

    name: str
    unit: Unit
    place: Place


@record
class Signal:
    """A named signal with its equation."""

    name: str
    expression: SignalExpression
    as_written: str
    place: Place


@record
class Break:
    """Where the loop is opened: at a signal for all its users, or at one use with named loops open."""

    name: str
    at: str
    place: Place
    into: str | None = None
    with_open: tuple[str, ...] = ()


@record
class Excitation:
    """One input that is driven: kind of the input and its quantities (`size`, `slope`, `duration` …)."""

    source: str
    kind: str
    quantities: Mapping[str, Value]
    options: Mapping[str, str]
    place: Place


@record
class Response:
    """A response of a loop: what drives it, which signal is looked at, what the error is measured from."""

    name: str
    excitations: tuple[Excitation, ...]
    to: str
    place: Place
    reference: str | None = None
    title: str | None = None


@record
class Loop:
    """Subsystems wired together."""

    name: str
    inputs: Mapping[str, LoopInput]
    signals: Mapping[str, Signal]
    responses: Mapping[str, Response]
    breaks: Mapping[str, Break]
    rest: Mapping[str, Value]
    place: Place
    title: str | None = None


# --- requirements ----------------------------------------------------------------------------------------


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
    budget: Mapping[str, object] | None = None
    kept: Mapping[str, object] = field(default_factory=dict)


@record
class Kept:
    """A named entry of a section that a later version answers (evidence, waivers, cases …), as written."""

    id: str
    content: Mapping[str, object]
    place: Place

    @property
    def requirements(self) -> tuple[str, ...]:
        """The ids of the requirements that it names."""
        named = self.content.get("requirement")
        return tuple(map(str, named)) if isinstance(named, list | tuple) else () if named is None else (str(named),)


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
    evidence: Mapping[str, Kept] = field(default_factory=dict)
    waivers: Mapping[str, Kept] = field(default_factory=dict)
    masks: Mapping[str, MaskDefinition] = field(default_factory=dict)
    kept: Mapping[str, tuple[Kept, ...]] = field(default_factory=dict)
    """Sections answered later (cases, decision_rule …), by name."""
    warnings: tuple[object, ...] = ()
    """Findings of the intake below level error (specgate.terms.findings.Finding)."""
