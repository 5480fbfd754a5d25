"""What a settling response does in the end: from when on it stays on one side of its final value, if it does.

Lemma. Let the modes be ordered by real part. If the slowest are all complex pairs, the deviation changes sign for
ever: the sum of their highest powers is almost periodic with mean zero, so it comes back to a positive and to a
negative value again and again, and all else decays against it. If one real pole s1 is slowest, its highest term
c t^m e^(s1 t) outweighs all others from some time on: the ratios |D| t^(j-m) e^((sigma - s1) t) / |c| fall for good
beyond (j - m) / (s1 - sigma), and once the sum of their suprema over [T, infinity) is below one the sign is that of c.
Terms of real poles with the sign of c are left out of the sum: they only help.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from flint import arb

from specgate.response.modes import Expansion, Mode
from specgate.response.segments import Floats, at_most
from specgate.response.tail import smallest
from specgate.terms.precision import working_precision


@dataclass(frozen=True)
class Lasting:
    """From `since` on (normalised time) the deviation has this sign and is never zero."""

    sign: int
    since: float


def lasting_sign(expansion: Expansion) -> Lasting | None:
    """Return from when on g keeps one sign; None if it changes sign for ever, or if that is not told."""
    with working_precision(expansion.bits):
        slowest = max(expansion.modes, key=lambda mode: float(mode.pole.real))
        others = [mode for mode in expansion.modes if mode is not slowest]
        if slowest.oscillates or any(mode.pole.real.overlaps(slowest.pole.real) for mode in others):
            return None
        lead = slowest.coefficients[-1].real
        if lead.contains(0):
            return None
        sign = 1 if lead > 0 else -1
        terms = [(mode, j, c) for mode in expansion.modes for j, c in enumerate(mode.coefficients)]
        opposing = [
            _ratio(mode, j, slowest, lead)
            for mode, j, c in terms
            if not (mode is slowest and j == len(slowest.coefficients) - 1)
            and (mode.oscillates or not c.real * sign > 0)
        ]
    rows = np.array(opposing, dtype=np.float64).reshape(-1, 3)
    since = smallest(lambda times: _sum(rows, times), 1.0 - 1e-9)
    return None if since is None else Lasting(sign, since)


def _ratio(mode: Mode, j: int, slowest: Mode, lead: arb) -> tuple[float, float, float]:
    """Return size, power and rate of |D| t^j e^(sigma t) over the leading term; the rate is not above zero."""
    power = j - (len(slowest.coefficients) - 1)
    rate = 0.0 if mode is slowest else min(0.0, at_most(mode.pole.real - slowest.pole.real))
    return at_most(abs(mode.coefficients[j]) / abs(lead)), float(power), rate


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
