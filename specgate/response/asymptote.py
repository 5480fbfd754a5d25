"""What a settling response does in the end: from when on it stays on one side of its final value, if it does.

Lemma. Let the modes be ordered by real part. If the slowest are all complex pairs, the deviation changes sign for
ever: the sum of their highest powers is almost periodic with mean zero, so it comes back to a positive and to a
negative value again and again, and all else decays against it. If one real pole s1 is slowest, its highest term
c t^m e^(s1 t) outweighs all others from some time on: the ratios |D| t^(j-m) e^((sigma - s1) t) / |c| fall for good
beyond (j - m) / (s1 - sigma), or stay where sigma = s1 and j = m, and once the sum of their suprema over [T, infinity)
is below one the sign is that of c. Terms of real poles with the sign of c are left out of the sum: they only help.
"""

from __future__ import annotations

import numpy as np
from flint import arb, fmpq, fmpq_poly

from specgate.response.falling import smallest
from specgate.response.modes import Expansion, Mode
from specgate.response.segments import Floats, at_most
from specgate.systems.polynomials import primitive
from specgate.systems.stability import classify
from specgate.terms.precision import working_precision
from specgate.terms.records import record


@record
class Lasting:
    """From `since` on (normalised time) the deviation has this sign and is never zero."""

    sign: int
    since: float


def lasting_sign(expansion: Expansion, denominator: fmpq_poly, share: float = 1.0) -> Lasting | None:
    """Return from when on g keeps one sign; None if it changes sign for ever, or if that is not told.

    From then on |g| is at least 1 - `share` of its leading term. The poles of the expansion are roots of the
    denominator; it decides exactly whether two of them have one real part.
    """
    with working_precision(expansion.bits):
        lead = leading_mode(expansion)
        top = lead.coefficients[-1].real
        if lead.oscillates or top.contains(0):
            return None
        sign = 1 if top > 0 else -1
        tied = _tied(expansion, lead, denominator)
        opposing: list[tuple[float, float, float]] = []
        for mode in expansion.modes:
            rate = 0.0 if any(mode is other for other in tied) else at_most(mode.pole.real - lead.pole.real)
            if rate > 0.0:
                return None
            for j, c in enumerate(mode.coefficients):
                power = j - (len(lead.coefficients) - 1)
                if (mode is not lead or power != 0) and (mode.oscillates or not c.real * sign > 0):
                    opposing.append((at_most(abs(c) / abs(top)), float(power), rate))
    rows = np.array(opposing, dtype=np.float64).reshape(-1, 3)
    if (rows[:, 1][rows[:, 2] == 0.0] > 0.0).any():
        return None
    since = smallest(lambda times: _sum(rows, times), share * (1.0 - 1e-9))
    return None if since is None else Lasting(sign, since)


def leading_mode(expansion: Expansion) -> Mode:
    """Return the slowest mode, the fastest growing one; of those whose real parts are not told apart a real one."""
    with working_precision(expansion.bits):
        slowest = max(expansion.modes, key=lambda mode: float(mode.pole.real))
        close = [mode for mode in expansion.modes if mode.pole.real.overlaps(slowest.pole.real)]
        return max(close, key=lambda mode: (not mode.oscillates, len(mode.coefficients)))


def _tied(expansion: Expansion, lead: Mode, denominator: fmpq_poly) -> list[Mode]:
    """Return the modes whose real part is proved to be that of the real leading one, itself among them.

    On the axis parts are known to be zero. Where the leading pole is a rational number q (its product with the leading
    coefficient of the polynomial in whole numbers is whole), the roots with real part q are the axis roots of p(s + q).
    """
    close = [mode for mode in expansion.modes if mode is lead or mode.pole.real.overlaps(lead.pole.real)]
    if all(mode.pole.real.is_zero() for mode in close) or len(close) == 1:
        return close
    whole = primitive(denominator)
    root = (lead.pole.real * arb(whole.leading_coefficient())).unique_fmpz()
    if root is None:
        return [lead]
    number = fmpq(root, whole.leading_coefficient())
    there = classify(denominator(fmpq_poly([number, 1])))
    expected = sum(2 * len(mode.coefficients) for mode in close if mode.oscillates)
    return close if there.origin > 0 and there.axis - there.origin == expected else [lead]


def _sum(rows: Floats, times: Floats) -> Floats:
    """Return the sum of the suprema over [t, infinity) of the ratios."""
    size, power, rate = rows.T
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        summit = np.where(power > 0.0, power / -rate, 0.0)
        instants = np.maximum(times[:, None], summit)
        growth = np.where(power == 0.0, 0.0, power * np.log(instants))
        ratios = np.where(size > 0.0, size * np.exp(growth + rate * instants), 0.0)
    total: Floats = ratios.sum(axis=1)
    return total
