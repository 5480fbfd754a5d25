"""Which side an error is on: a promise that looks better than the truth is unsafe."""

from __future__ import annotations

from collections.abc import Callable

from flint import arb

from specgate.compliance.assessment import FormulaError, Side
from specgate.compliance.compare import Limits
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision

_ENOUGH = 256
"""Bits at which two numbers that are still not apart count as equal: neither side."""


def side(promise: Answer, truth: Answer, limits: Limits) -> Side:
    """Return on which side of the truth a promise lies, as seen from the limit."""
    leaning = _leaning(promise, truth, limits)
    return "none" if leaning == 0 else "unsafe" if leaning > 0 else "safe"


def formula_error(formula: Answer, truth: Answer, limits: Limits) -> FormulaError:
    """Return formula against truth; both must have a value."""
    if formula.exact is not None and truth.exact is not None:
        absolute = Answer.of_exact(formula.exact - truth.exact)
        relative = None if truth.exact == 0 else Answer.of_exact(formula.exact / truth.exact - 1)
    else:
        absolute = Answer.of_ball(lambda bits: _difference(formula, truth, bits))
        relative = None if _may_be_zero(truth) else Answer.of_ball(lambda bits: _ratio(formula, truth, bits))
    return FormulaError(absolute, relative, side(formula, truth, limits), truth)


def _leaning(promise: Answer, truth: Answer, limits: Limits) -> int:
    """Return +1 where the promise is nearer to the good side than the truth, -1 where farther, 0 else."""
    if limits.least is not None and limits.most is not None:
        centre = (limits.least + limits.most) / 2
        return _sign(lambda bits: abs(truth.enclose(bits) - centre) - abs(promise.enclose(bits) - centre))
    if limits.most is not None:
        return _sign(lambda bits: truth.enclose(bits) - promise.enclose(bits))
    if limits.least is not None:
        return _sign(lambda bits: promise.enclose(bits) - truth.enclose(bits))
    return 0


def _sign(difference: Callable[[int], arb]) -> int:
    for bits in (64, 128, _ENOUGH):
        with working_precision(bits):
            ball = difference(bits)
            if ball > 0:
                return 1
            if ball < 0:
                return -1
    return 0


def _difference(formula: Answer, truth: Answer, bits: int) -> arb:
    with working_precision(bits):
        return formula.enclose(bits) - truth.enclose(bits)


def _ratio(formula: Answer, truth: Answer, bits: int) -> arb:
    # The ball of the truth may be wider than asked for: a first try at more bits keeps zero out of the divisor.
    with working_precision(bits):
        return formula.enclose(bits) / truth.enclose(max(bits, _ENOUGH)) - 1


def _may_be_zero(value: Answer) -> bool:
    return bool(value.enclose(_ENOUGH).contains(0))
