"""How a response begins: the first stretch of time on which it is proved to move one way only."""

from __future__ import annotations

from math import exp, factorial

from flint import arb, arb_series, fmpq_poly

from specgate.response.budget import OutOfWork
from specgate.response.segments import at_least, at_most
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

_BITS = 128
_LONGEST, _SHORTEST = 4, -1000
_SLOWEST = 2.0**-20
"""Least rho: zero, for poles that all lie at the origin, would bound nothing."""


@record
class Start:
    """On (0, length] the slope of the response has the sign `direction` and |y'(t)| >= floor * t^power.

    length is a power of two; all in normalised units.
    """

    length: float
    direction: int
    floor: float
    power: int


def first_stretch(numerator: fmpq_poly, denominator: fmpq_poly) -> Start | None:
    """Return the monotone start of the step response of numerator/denominator, None where it never moves.

    With y = sum h_k t^k / k! (h_k the coefficients of numerator/denominator in powers of 1/s) let h_m be the first
    nonzero one with m >= 1. For k > n the h_k obey the recurrence of the denominator, so |h_k| <= C rho^k for all
    k >= 1 if it holds for k <= n and rho^n >= sum |a_i| rho^i, which rho = 2 max |a_{n-i}|^{1/i} fulfils. Then
    y'(t) / (h_m t^{m-1}/(m-1)!) - 1 is at most the sum of the ratios of the further terms up to n and of the tail
    C rho^{n+1} t^n e^{rho t} / n!. The stretch is the longest power of two at which that sum is at most one half.
    Raises OutOfWork where that is out of the range of floats.
    """
    order = denominator.degree()
    moving = numerator - denominator * (numerator[order] / denominator[order])
    if not moving:
        return None
    first = order - moving.degree()
    with working_precision(_BITS):
        terms = in_inverse_powers(moving, denominator, moving.degree() + 1)
        rate = _growth(denominator)
        lead = abs(terms[0])
        ratios = [at_most(abs(term) / lead) for term in terms[1:]]
        tail = max([1.0, *(ratio / rate**k for k, ratio in enumerate(ratios, 1))])
        smallest = at_least(lead)
    for exponent in range(_LONGEST, _SHORTEST, -1):
        if _remainder(2.0**exponent, first, ratios, tail, rate) <= 0.499:
            floor = 0.5 * smallest / factorial(first - 1) * (1.0 - 1e-12)
            return Start(2.0**exponent, 1 if terms[0] > 0 else -1, floor, first - 1)
    raise OutOfWork("the response begins to move on a scale of time that is out of range")


def in_inverse_powers(moving: fmpq_poly, denominator: fmpq_poly, count: int) -> list[arb]:
    """Return the first `count` coefficients of moving/denominator in powers of 1/s, from the first nonzero one on."""
    with series_terms(count):
        top = arb_series([arb(c) for c in reversed(moving.coeffs())], count)
        bottom = arb_series([arb(c) for c in reversed(denominator.coeffs())], count)
        terms = (top / bottom).coeffs()
    return [*terms, *([arb(0)] * (count - len(terms)))]


def _growth(denominator: fmpq_poly) -> float:
    """Return rho, rounded up."""
    order, lead = denominator.degree(), denominator.leading_coefficient()
    rates = [2 * abs(arb(denominator[order - i] / lead)).root(i) for i in range(1, order + 1)]
    return max(_SLOWEST, *(at_most(rate) for rate in rates))


def _remainder(time: float, first: int, ratios: list[float], tail: float, rate: float) -> float:
    """Return a bound of the further terms of y' over its first one at `time`."""
    total, weight = 0.0, 1.0
    for k, ratio in enumerate(ratios, 1):
        weight *= time / (first + k - 1)
        total += ratio * weight
    beyond = weight * time / (first + len(ratios))
    return (total + tail * rate ** (len(ratios) + 1) * beyond * exp(min(rate * time, 700.0))) * (1.0 + 1e-9)
