"""Oscillations that the samples of a settled signal do not show."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.response.piecewise import PiecewiseResponse
from specgate.response.piecewise.climbing import value_at
from specgate.sampled.pieces import SampledPieces
from specgate.terms.precision import working_precision

BAND = fmpq(1, 50)
"""The band about the final value, as a part of the change, in which samples and signal are compared."""

_PERIODS = 2
"""Periods by which the signal has to be later than its samples."""

_LONGEST = 4096


def settled_late(response: PiecewiseResponse, pieces: SampledPieces, period: fmpq) -> tuple[fmpq, arb] | None:
    """Return the last sample (s) outside the band and the time at which the signal settles, where that is much later.

    None where it is not, or where the signal has no change to take a part of.
    """
    final = response.final_value().exact
    if final is None or final == 0:
        return None
    settled = response.settling(abs(final) * BAND)
    if settled.absent is not None:
        return None
    time = settled.enclose(64)
    last = int((time.mid().fmpq() / period).floor())
    for sample in range(last, max(last - _LONGEST, -1), -1):
        if not _inside(pieces, sample * period, final):
            return (sample * period, time) if last - sample > _PERIODS else None
    return None


def _inside(pieces: SampledPieces, time: fmpq, final: fmpq) -> bool:
    value = value_at(pieces, pieces.holding(time), 0, time, 64)
    with working_precision(96):
        return bool(abs(value - final) <= arb(abs(final) * BAND))
