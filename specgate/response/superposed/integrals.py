"""Integrals of sums of modes and of their squares, in closed form.

The integral of t^m e^(qt) is e^(qt) times a polynomial whose coefficients follow each other backward,
b_k = (a_k - (k + 1) b_(k+1)) / q. Where q times the length is small, or may be zero, its Taylor series is integrated
instead; the terms after K are at most x^K / K! / (1 - x / (K + 1)) times those before, x = |q| length.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import acb, acb_poly, arb, fmpq, fmpq_poly

from specgate.response.modes import Expansion
from specgate.terms.precision import working_precision

Term = tuple[acb, tuple[acb, ...]]

_SMALL = 1


def integral(modes: Expansion, drift: fmpq_poly, left: fmpq, right: fmpq) -> arb:
    """Return a ball of the integral of drift(t) + Re(sum c t^j e^(pt)) from left to right."""
    primitive = drift.integral()
    with working_precision(modes.bits):
        total = arb(primitive(right) - primitive(left))
        for mode in modes.modes:
            total += exponential(mode.pole, mode.coefficients, left, right, modes.bits).real
        return total


def square_integral(modes: Expansion, drift: fmpq_poly, left: fmpq, right: fmpq) -> arb:
    """Return a ball of the integral of the square of drift(t) + Re(sum c t^j e^(pt)) from left to right.

    With z = c t^j e^(pt), Re z Re w = Re(z w + z conj w) / 2.
    """
    primitive = (drift * drift).integral()
    with working_precision(modes.bits):
        total = arb(primitive(right) - primitive(left))
        terms: list[Term] = [(mode.pole, mode.coefficients) for mode in modes.modes]
        constant = tuple(acb(arb(c)) for c in drift.coeffs())
        for index, (pole, factors) in enumerate(terms):
            if constant:
                total += 2 * exponential(pole, _product(factors, constant), left, right, modes.bits).real
            for other, (second, more) in enumerate(terms[: index + 1]):
                weight = 1 if other == index else 2
                both = exponential(pole + second, _product(factors, more), left, right, modes.bits)
                apart = exponential(
                    pole + _conjugate(second), _product(factors, _conjugates(more)), left, right, modes.bits
                )
                total += weight * (both + apart).real / 2
        return total


def exponential(rate: acb, factors: Sequence[acb], left: fmpq, right: fmpq, bits: int) -> acb:
    """Return the integral of e^(rate t) times a polynomial in t."""
    length = arb(right - left)
    if not bool(abs(rate) * length > _SMALL):
        return _nearly_polynomial(rate, factors, left, right, bits)
    coefficients, last = [], acb(0)
    for power in range(len(factors) - 1, -1, -1):
        last = (factors[power] - (power + 1) * last) / rate
        coefficients.append(last)
    ends = []
    for end in (arb(right), arb(left)):
        value = acb(0)
        for c in coefficients:
            value = value * end + c
        ends.append(value * (rate * end).exp())
    difference: acb = ends[0] - ends[1]
    return difference


def _nearly_polynomial(rate: acb, factors: Sequence[acb], left: fmpq, right: fmpq, bits: int) -> acb:
    """Return the same by the Taylor series of e^(rate u), u = t - left, |rate| length not far above one at most."""
    length = arb(right - left)
    shifted = _shifted(factors, arb(left))
    reach = (abs(rate) * length).upper()
    terms, power, term, bound = [], 0, acb(1), arb(1)
    while bound > arb(2) ** -bits or power <= 2 * reach:
        terms.append(term)
        power += 1
        term, bound = term * rate / power, bound * reach / power
    total = (acb_poly(terms) * acb_poly(shifted)).integral()(length)
    size = sum((abs(c) * length ** (j + 1) for j, c in enumerate(shifted)), arb(0))
    spread = (2 * bound * size).upper()
    return (total + acb(arb(0, spread), arb(0, spread))) * (rate * arb(left)).exp()


def _shifted(factors: Sequence[acb], by: arb) -> list[acb]:
    """Return the coefficients of p(t + by)."""
    result: list[acb] = []
    for c in reversed(factors):
        result = [
            (result[k] if k < len(result) else acb(0)) * by + (result[k - 1] if k > 0 else acb(0))
            for k in range(len(result) + 1)
        ]
        result[0] = result[0] + c
    return result


def _product(one: Sequence[acb], other: Sequence[acb]) -> list[acb]:
    result = [acb(0)] * (len(one) + len(other) - 1)
    for j, a in enumerate(one):
        for k, b in enumerate(other):
            result[j + k] = result[j + k] + a * b
    return result


def _conjugate(value: acb) -> acb:
    return acb(value.real, -value.imag)


def _conjugates(values: Sequence[acb]) -> list[acb]:
    return [_conjugate(value) for value in values]
