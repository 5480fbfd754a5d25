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

from specgate.response.modes import Expansion, Mode
from specgate.response.segments import Floats, at_most
from specgate.response.tail import smallest
from specgate.terms.precision import working_precision


@dataclass(frozen=True)
class Lasting:
    """From `since` on (normalised time) the deviation has this sign and is never zero."""

    sign: int
    since: float


def lasting_sign(expansion: Expansion, share: float = 1.0) -> Lasting | None:
    """Return from when on g keeps one sign; None if it changes sign for ever, or if that is not told.

    From then on |g| is at least 1 - `share` of its leading term.
    """
    with working_precision(expansion.bits):
        lead = max(expansion.modes, key=_slowness)
        top = lead.coefficients[-1].real
        if lead.oscillates or top.contains(0):
            return None
        sign = 1 if top > 0 else -1
        opposing: list[tuple[float, float, float]] = []
        for mode in expansion.modes:
            rate = _rate(mode, lead)
            if rate is None:
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


def _slowness(mode: Mode) -> tuple[float, bool, int]:
    """Order modes by real part; among equals real ones come last, then the higher power."""
    return float(mode.pole.real), not mode.oscillates, len(mode.coefficients)


def _rate(mode: Mode, lead: Mode) -> float | None:
    """Return an upper bound, not above zero, of the growth of a mode against the leading one, None if not told."""
    if mode is lead or (mode.pole.real.is_zero() and lead.pole.real.is_zero()):
        return 0.0
    rate = at_most(mode.pole.real - lead.pole.real)
    return rate if rate < 0.0 else None


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
