"""Fits of a time of a pair: a polynomial in its damping ratio over its natural frequency."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.approximations.features import Features
from specgate.approximations.figures import combined
from specgate.response.answers import Answer

Polynomial = tuple[fmpq, ...]
"""Coefficients, lowest power of the damping ratio first."""


def over_frequency(features: Features, polynomial: Polynomial) -> Answer:
    """Return the polynomial at the pair's damping ratio over its natural frequency, s, or why there is no value."""
    damping, frequency = features.damping, features.natural_frequency
    if damping is None or frequency is None:
        return Answer.nothing("there is no complex pair of poles")
    if not features.stable:
        return Answer.nothing("the response does not settle")
    if damping.exact is not None and frequency.exact is not None:
        return Answer.of_exact(_at(polynomial, damping.exact) / frequency.exact)
    return combined(lambda zeta, wn: _ball_at(polynomial, zeta) / wn, damping, frequency)


def _at(polynomial: Polynomial, zeta: fmpq) -> fmpq:
    return sum((coefficient * zeta**power for power, coefficient in enumerate(polynomial)), fmpq(0))


def _ball_at(polynomial: Polynomial, zeta: arb) -> arb:
    return sum((coefficient * zeta**power for power, coefficient in enumerate(polynomial)), arb(0))
