"""The monotone start of a sluggish response, followed by its Taylor series to where floats can take over.

With many more poles than zeros y' begins like t^(m-1), so small that the modes, which all but cancel there, leave no
digit of it in floats. Its Taylor series at the step does not cancel: y'(t) = h_m t^(m-1)/(m-1)! P(t), P(0) = 1, where
the coefficients of P come from those of the transfer function in powers of 1/s. P is positive on a cell if the smaller
of its values at both ends is more than M2 h^2 / 8, the rounding and the remainder; M2 is the sum of the |coefficients|
of P'' taken at the right end. The remainder after K terms is at most that of y': with q = m + K,
|y^(q)| <= sum |c| (t + q)^j e^(max(sigma, 0) t) over all terms c t^j e^(pt) with |p| <= 1, because the q-th derivative
of t^j e^(pt) is sum_i binom(j, i) q!/(q-i)! t^(j-i) p^(q-i) e^(pt).
"""

from __future__ import annotations

from dataclasses import replace
from math import exp, lgamma, log

import numpy as np
from flint import fmpq_poly

from specgate.response.modes import Expansion
from specgate.response.segments import UNIT_ROUNDOFF, Floats, at_most
from specgate.response.start import Start, in_inverse_powers
from specgate.terms.precision import working_precision

_BITS = 512
_TERMS = 192
_CELLS = 128
_LONGEST = 16.0
_ENOUGH = 1e-12
"""Slope, in units of the sum of the modes, that floats resolve well."""


def lengthened(start: Start, numerator: fmpq_poly, denominator: fmpq_poly, expansion: Expansion) -> Start:
    """Return the monotone start as long as its Taylor series proves it, if floats could not resolve the slope there.

    `expansion` is that of the response of numerator/denominator, with all |p| <= 1.
    """
    if start.floor * start.length**start.power > _ENOUGH:
        return start
    order = denominator.degree()
    moving = numerator - denominator * (numerator[order] / denominator[order])
    with working_precision(_BITS):
        terms = in_inverse_powers(moving, denominator, _TERMS)
        lead = at_most(1 / abs(terms[0]))
        factor, ratios = 1 / terms[0], []
        for k, term in enumerate(terms):
            ratios.append(term * factor)
            factor = factor / (start.power + k + 1)
    coefficients = np.array([float(ratio) for ratio in ratios])
    radii = np.array([float(ratio.rad()) for ratio in ratios])
    while start.length < _LONGEST:
        remainder = _remainder(expansion, start, lead, 2.0 * start.length)
        if not _positive(coefficients, radii, start.length, remainder):
            break
        start = replace(start, length=2.0 * start.length)
    return start


def _positive(coefficients: Floats, radii: Floats, left: float, remainder: float) -> bool:
    """Whether P is proved positive on [left, 2 left]."""
    times = left * (1.0 + np.arange(_CELLS + 1) / _CELLS)
    powers = np.empty((len(times), len(coefficients)))
    powers[:, 0], powers[:, 1:] = 1.0, times[:, None]
    np.multiply.accumulate(powers, axis=1, out=powers)
    k = np.arange(2, len(coefficients))
    value, size = powers @ coefficients, powers @ np.abs(coefficients)
    bend = powers[:, :-2] @ (np.abs(coefficients[2:]) * k * (k - 1))
    error = (2 * len(coefficients) + 4) * UNIT_ROUNDOFF * size[1:] + (powers @ radii)[1:] + remainder
    chord = bend[1:] * (left / _CELLS) ** 2 / 8.0
    return bool((np.minimum(value[:-1], value[1:]) > 1.01 * (chord + error)).all())


def _remainder(expansion: Expansion, start: Start, lead: float, time: float) -> float:
    """Return a bound of what P lacks after _TERMS terms, up to `time`."""
    order = start.power + 1 + _TERMS
    scale = log(lead) + lgamma(start.power + 1) - lgamma(order) + _TERMS * log(time)
    total = 0.0
    for mode in expansion.modes:
        growth = max(0.0, at_most(mode.pole.real)) * time + scale
        for j, c in enumerate(mode.coefficients):
            size = at_most(abs(c))
            total += exp(min(log(size) + j * log(time + order) + growth, 700.0)) if size > 0.0 else 0.0
    return 1.01 * total
