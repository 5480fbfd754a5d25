"""The forms in which the model of a subsystem may be written."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal

from specgate.project.types.values import Value
from specgate.terms.records import record

Polynomial = tuple[Value, ...]
"""Coefficients, highest power first."""

Matrix = tuple[tuple[Value, ...], ...]


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


@record
class UnreadModel:
    """Stands where something in a model was reported: nothing can be built of it."""


Model = (
    PolynomialModel
    | FactoredModel
    | PoleZeroModel
    | StateSpaceModel
    | PidModel
    | MatrixModel
    | SampledModel
    | UnreadModel
)
