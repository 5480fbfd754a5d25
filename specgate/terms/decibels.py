"""Decibels of an amplitude: 20 log10 of the ratio. Ratios are irrational unless the decibels are a multiple of 20."""

from __future__ import annotations

from math import gcd

from flint import arb, fmpq, fmpz

from specgate.terms.decimals import power_of_ten
from specgate.terms.precision import working_precision

LARGEST = 2000
"""Most decibels, of either sign."""


def amplitude_ratio(decibels: fmpq, pi: fmpq) -> fmpq:
    """Return 10^(decibels/20) as one fixed decimal, with as many digits as the `pi` in use has.

    Exact for multiples of 20 dB. Tying the digits to those of pi makes everything that rests on a rounded
    constant move together when a question is decided a second time. Raises ValueError beyond LARGEST.
    """
    if abs(decibels) > LARGEST:
        raise ValueError(f"more than {LARGEST} dB is no ratio to work with")
    exponent = decibels / 20
    if exponent.q == 1:
        return power_of_ten(int(exponent.p))
    digits = _digits(pi)
    with working_precision(4 * digits + 64):
        scaled = arb(10) ** arb(exponent - _floor(exponent)) * arb(fmpz(10) ** (digits - 1))
        nearest = (scaled + arb(fmpq(1, 2))).floor().unique_fmpz()
    if nearest is None:
        raise ValueError("this many decibels cannot be rounded to a ratio")
    return fmpq(nearest) * power_of_ten(_floor(exponent) - digits + 1)


def _floor(value: fmpq) -> int:
    return int(value.p) // int(value.q)


def _digits(pi: fmpq) -> int:
    """Count the digits of a decimal: its reduced denominator divides the power of ten that it was written with."""
    digits, denominator = 1, int(pi.q)
    while gcd(denominator, 10) != 1:
        denominator //= gcd(denominator, 10)
        digits += 1
    return digits
