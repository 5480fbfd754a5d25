"""What a claimed value stands for: itself, give or take half a unit of its last printed digit."""

from __future__ import annotations

from flint import fmpq

from specgate.project.parameters import Values, evaluate
from specgate.project.types import Claim
from specgate.terms.decibels import amplitude_ratio
from specgate.terms.decimals import power_of_ten
from specgate.terms.expressions import Number, literal_unit
from specgate.terms.unit import Unit


def claim_unit(claim: Claim, otherwise: Unit) -> Unit:
    """Return the unit that a claim is written in; that of the result for a plain number or an expression."""
    return literal_unit(claim.value.expression) or otherwise


def claim_range(claim: Claim, unit: Unit, values: Values) -> tuple[fmpq, fmpq]:
    """Return the values (SI) that round to the claim, `unit` being the one it is written in. Raises Fault."""
    half = power_of_ten(claim.digits) / 2
    expression = claim.value.expression
    if unit.kind == "decibel" and isinstance(expression, Number):
        return amplitude_ratio(expression.value - half, values.pi), amplitude_ratio(expression.value + half, values.pi)
    value, step = evaluate(claim.value, values), half * unit.factor_with(values.pi)
    return value - step, value + step
