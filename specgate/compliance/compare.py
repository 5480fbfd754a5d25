"""A measure against a limit: the only place that raises precision until the question is decided."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Literal

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Verdict

Sign = Literal[-1, 0, 1]
AtLimit = Callable[[fmpq], Sign | None]
"""Exact sign of measure minus limit where a measure has such a predicate; None where it cannot tell."""

_FIRST = 64
_EXACT_FROM = 128
"""Bits at which a ball that still holds the limit is taken for equality, to be decided exactly.

Below 60 digits: a limit of 45 deg is a decimal of 60 digits, which more bits tell from a quarter of pi.
"""


@record
class Limits:
    """What a measure must satisfy: not below `least`, not above `most` (SI); or be `truth` (of a yes/no question)."""

    least: fmpq | None = None
    most: fmpq | None = None
    truth: bool | None = None


@record
class Comparison:
    """A verdict and, where it is not a plain number that decides it, the reason in words."""

    verdict: Verdict
    reason: str | None = None


def compare(answer: Answer, limits: Limits, at_limit: AtLimit | None = None) -> Comparison:
    """Judge an answer. Touching a limit is inside it."""
    if answer.absent is not None:
        return _without_value(answer, limits)
    if limits.truth is not None:
        return Comparison(_met(answer.truth is limits.truth))
    if answer.truth is not None:
        raise ValueError("a yes/no measure is limited by `equals: true` or `equals: false`")
    verdicts = [
        _one_sided(sign(answer, bound, at_limit), wanted)
        for bound, wanted in ((limits.least, 1), (limits.most, -1))
        if bound is not None
    ]
    verdict = worst(verdicts)
    undecided = f"the value cannot be told from the limit at {HIGHEST} bits" if verdict is Verdict.OPEN else None
    return Comparison(verdict, undecided)


def sign(answer: Answer, bound: fmpq, at_limit: AtLimit | None = None) -> Sign | None:
    """Return the sign of answer minus bound; None where even the narrowest ball holds the bound."""
    if answer.exact is not None:
        return _sign_of_exact(answer.exact - bound)
    bits = _FIRST
    while bits <= HIGHEST:
        value = answer.enclose(bits)
        with working_precision(bits):
            difference = value - arb(bound)
            if difference > 0:
                return 1
            if difference < 0:
                return -1
        if bits == _EXACT_FROM:
            decided = _exactly(bound, at_limit, answer.against)
            if decided is not None:
                return decided
        bits *= 2
    return None


def _exactly(bound: fmpq, *predicates: AtLimit | None) -> Sign | None:
    found = (predicate(bound) for predicate in predicates if predicate is not None)
    return next((sign for sign in found if sign is not None), None)


def worst(verdicts: Iterable[Verdict]) -> Verdict:
    """Return non_compliant if any is, else open if any is, else compliant. Raises ValueError for none at all."""
    order = (Verdict.COMPLIANT, Verdict.OPEN, Verdict.NON_COMPLIANT)
    return max(verdicts, key=order.index)


def _without_value(answer: Answer, limits: Limits) -> Comparison:
    absent = answer.absent
    assert absent is not None
    if absent.infinite:
        return Comparison(_met(limits.least is not None and limits.most is None), absent.reason)
    return Comparison(Verdict.NON_COMPLIANT if absent.proved else Verdict.OPEN, absent.reason)


def _one_sided(found: Sign | None, wanted: int) -> Verdict:
    if found is None:
        return Verdict.OPEN
    return _met(found in (0, wanted))


def _met(holds: bool) -> Verdict:
    return Verdict.COMPLIANT if holds else Verdict.NON_COMPLIANT


def _sign_of_exact(value: fmpq) -> Sign:
    if value == 0:
        return 0
    return 1 if value > 0 else -1
