"""Modes in floats: samples with proved rounding bounds, and envelopes of all derivatives.

Rounding bound. With u = 2^-53, the time t the float itself, and |p| t u <= 1e-4, every computed derivative is off by
at most the sum over all columns (K + 3 |p| t) u |D| t^j e^(sigma t) + r t^j e^(sigma t) + 1e-280, where

- the exponent sigma t carries the rounding of sigma and of the product, 2.01 u |sigma| t, the angle likewise; together
  2.02 (|sigma| + |omega|) t u <= 2.86 |p| t u of the column;
- exp, sin and cos are within 4 ulp, that is 8 u of the column for exp and 8 sqrt(2) u for the pair (cos, sin)
  (tests/response/test_elementary_functions.py holds the machine to it);
- the j products by (scale t), the product of exp and cos, the rounding of D and the product by it: (j + 3) u, and the
  sum of at most 2 M terms for M columns, of which those of a pair add to at most |D| sqrt(2): 2 sqrt(2) M u;
- r is the radius of the ball that D is the middle of (absolute: a relative one would be void for a D that is zero).

So K = 3 M + max j + 24, and 10 more for the two halves that the exponential of a repeated pole is made of. Second-order
terms and the rounding of the bound itself are below 1 %. Results below the
normal range are off by less than 1e-280, because the response is scaled to modes of size one.
"""

from __future__ import annotations

from functools import cached_property
from math import frexp

import numpy as np
from flint import acb, fmpq
from numpy.typing import NDArray

from specgate.response.falling import DOUBLINGS
from specgate.response.modes import Expansion, power_of_two
from specgate.response.segments import UNIT_ROUNDOFF, Floats
from specgate.terms.records import record

TINY = 1e-280
"""Absolute allowance for what falls out of the normal range of floats."""

SLACK = 1.01
"""Factor that covers second-order terms of a rounding bound and the rounding of the bound itself."""

_ORDERS = 6


@record
class FloatModes:
    """The modes of an expansion as float columns, one for every mode and power j.

    start: the instant that times count from. decay, frequency: sigma and omega, shape (M,). scale: the power of two
    that t is counted in, so that (scale t)^j stays in range. power: j. real, imaginary: middles of the coefficients
    of the first three derivatives, shape (M, 3); radius: their radii; size: upper bounds of |D| of the derivatives
    0 ... 5, shape (M, 6).
    """

    start: fmpq
    decay: Floats
    frequency: Floats
    scale: Floats
    power: Floats
    real: Floats
    imaginary: Floats
    radius: Floats
    size: Floats

    @staticmethod
    def of(expansion: Expansion, start: fmpq) -> FloatModes:
        """Tabulate an expansion (already rebased to `start`)."""
        rows = expansion.derivative_rows(_ORDERS)
        columns = [
            _column(mode.pole, j, [rows[k][index][j] for k in range(_ORDERS)])
            for index, mode in enumerate(expansion.modes)
            for j in range(len(mode.coefficients))
        ]
        table = np.array(columns, dtype=np.float64).reshape(len(columns), 4 + 9 + _ORDERS)
        decay, frequency, scale, power = table[:, :4].T
        return FloatModes(
            start, decay, frequency, scale, power, table[:, 4:7], table[:, 7:10], table[:, 10:13], table[:, 13:]
        )

    @cached_property
    def speed(self) -> float:
        """The largest |p|, 0 if there is no mode."""
        return float(np.hypot(self.decay, self.frequency).max(initial=0.0))

    @cached_property
    def _swings(self) -> NDArray[np.bool_]:
        swings: NDArray[np.bool_] = self.frequency != 0.0
        return swings

    @cached_property
    def _weights(self) -> Floats:
        """Matrix that turns columns into values: first all by cos (real ones as they are), then pairs by sin."""
        return np.concatenate([self.real, -self.imaginary[self._swings]])

    @cached_property
    def _error_weights(self) -> Floats:
        """Shape (M, 6): weights of the columns in the constant and in the time-proportional part of the bound."""
        fixed = 3 * len(self.power) + self.power.max(initial=0.0) + 34
        size = self.size[:, :3]
        growing = 3 * np.hypot(self.decay, self.frequency)[:, None] * size
        return SLACK * np.concatenate([fixed * UNIT_ROUNDOFF * size + self.radius, UNIT_ROUNDOFF * growing], axis=1)

    def alive(self, time: float) -> FloatModes:
        """Return the table without the columns that stay below 1e-285 from `time` on (TINY covers them)."""
        with np.errstate(divide="ignore", invalid="ignore"):
            size = np.log(self.size.max(axis=1)) + self.decay * time + self.power * np.log(2.0 * time * self.scale)
        keep = (size > -656.0) | (self.decay >= 0.0) | (self.power > -self.decay * time)
        if keep.all():
            return self
        fields = (self.decay, self.frequency, self.scale, self.power, self.real, self.imaginary, self.radius, self.size)
        return FloatModes(self.start, *(field[keep] for field in fields))

    def _columns(self, instants: Floats, powers_at: Floats) -> Floats:
        """Return (scale t)^j e^(sigma t) of all columns, the power at `powers_at`, both (n, M) or (n, 1).

        Powers stand between two halves of the exponential, which alone might leave the normal range where they do not.
        """
        if not self.power.any():
            simple: Floats = np.exp(instants * self.decay)
            return simple
        half: Floats = np.exp(0.5 * instants * self.decay)
        columns, ratio = half, powers_at * self.scale
        for j in range(1, int(self.power.max()) + 1):
            columns = np.where(self.power >= j, columns * ratio, columns)
        return columns * half

    def sample(self, times: Floats) -> tuple[Floats, Floats]:
        """Return g, g', g'' and their error bounds, both of shape (n, 3)."""
        instants = times[:, None]
        columns = self._columns(instants, instants)
        errors = columns @ self._error_weights
        if self._swings.any():
            angles = instants * self.frequency
            columns = np.concatenate([columns * np.cos(angles), (columns * np.sin(angles))[:, self._swings]], axis=1)
        return columns @ self._weights, errors[:, :3] + instants * errors[:, 3:] + TINY

    def bounds(self, left: Floats, right: Floats) -> Floats:
        """Return bounds of the derivatives 2 ... 5 over intervals: every factor of a column at its worst end."""
        return SLACK * (self._worst(left, right) @ self.size[:, 2:]) + TINY

    def envelopes(self, left: Floats, right: Floats) -> Floats:
        """Return bounds of the derivatives 0 ... 5 of every column over intervals, shape (n, M, 6)."""
        return SLACK * self._worst(left, right)[:, :, None] * self.size

    def _worst(self, left: Floats, right: Floats) -> Floats:
        instants = np.where(self.decay > 0.0, right[:, None], left[:, None])
        return self._columns(instants, right[:, None])

    def parts(self, times: Floats) -> Floats:
        """Return for decaying columns the supremum over [t, infinity) of |D| t^j e^(sigma t), shape (n, M).

        A column rises up to j / |sigma| and falls beyond. No slack: the relative error is below `parts_error`.
        """
        instants = np.maximum(times[:, None], self._summit)
        return self._columns(instants, instants) * self.size[:, 0]

    @cached_property
    def _summit(self) -> Floats:
        """Where columns are largest; those that do not decay, in the end."""
        with np.errstate(divide="ignore", invalid="ignore"):
            fading = np.where(self.power > 0.0, self.power / -self.decay, 0.0)
        return np.where(self.decay < 0.0, fading, np.inf)

    def crest(self, left: float, right: float) -> float:
        """Return a bound of |g| on an interval, the sum of the suprema of all columns, but for `parts_error`."""
        instants = np.clip(self._summit, left, right)[None, :]
        return float((self._columns(instants, instants) * self.size[:, 0]).sum())

    def crest_time(self) -> float | None:
        """Return where the envelope of decaying columns is largest, about; None: it never rises, or for ever."""
        if not self.power.any() or (self.decay >= 0.0).any():
            return None
        times = np.concatenate([self._summit[np.isfinite(self._summit) & (self._summit > 0.0)], DOUBLINGS])
        for _ in range(2):
            instants = times[:, None]
            best = float(times[(self._columns(instants, instants) @ self.size[:, 0]).argmax()])
            times = best * np.linspace(0.5, 2.0, 193)
        return best if best > 0.0 else None

    @cached_property
    def parts_at_doublings(self) -> Floats:
        """The sum of the parts at the times 0 and 2^-40, 2^-39 ... 2^399."""
        total: Floats = self.parts(DOUBLINGS).sum(axis=1)
        return total

    @cached_property
    def slowest(self) -> float:
        """The smallest decay rate of a column."""
        return float(-self.decay.max(initial=-np.inf))

    @cached_property
    def parts_error(self) -> float:
        """Relative error of a sum of `parts` while no exponent is below -700."""
        return float(len(self.power) + 2 * self.power.max(initial=0.0) + 1500) * UNIT_ROUNDOFF


def _column(pole: acb, j: int, coefficients: list[acb]) -> list[float]:
    """Return one row of the table; coefficients are rescaled from t^j to (scale t)^j."""
    magnitude = float(abs(pole).mid())
    exponent = frexp(magnitude)[1] if magnitude > 0.0 else 0
    real, imaginary, radius, size = [], [], [], []
    for order, coefficient in enumerate(coefficients):
        c = coefficient * power_of_two(-exponent * j) if j else coefficient
        if order < 3:
            real.append(float(c.real))
            imaginary.append(float(c.imag))
            radius.append((float(c.real.rad()) + float(c.imag.rad())) * SLACK)
        size.append(float(c.abs_upper()) * (1.0 + 4.0 * UNIT_ROUNDOFF))
    return [float(pole.real), float(pole.imag), 2.0**exponent, float(j), *real, *imaginary, *radius, *size]
