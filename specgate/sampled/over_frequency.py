"""A sampled loop opened at a break, over frequency: exactly where L(z) is rational, else in balls."""

from __future__ import annotations

from flint import fmpq

from specgate.frequency.questions import OpenLoop, Range
from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.sampled.enclosed_axis import Axis
from specgate.sampled.enclosed_loop import NO_LAG, EnclosedLoop
from specgate.sampled.opened import SampledOpening
from specgate.sampled.phase import phase_at
from specgate.sampled.scale import BEYOND, SampledScale
from specgate.sampled.transfer import PulseTransfer
from specgate.systems.error_constants import position_constant
from specgate.systems.transfer import TransferFunction


class RationalSampledLoop(RationalLoop):
    """L(z) with rational coefficients: a rational function of w, whose frequencies end at pi/T."""

    def __init__(self, transfer: PulseTransfer, slow: TransferFunction, period: fmpq, *, stable: bool) -> None:
        scale = SampledScale(period)
        super().__init__(TransferFunction(*transfer.exact_in_w()), stable, scale)
        self._sampled, self._slow, self._rate = transfer, slow, scale

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L| at a frequency."""
        return Answer.nothing(BEYOND) if self._rate.beyond(frequency) else super().gain_at(frequency)

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Leave it open: lag over frequency is not the dead time that a sampled loop stands."""
        return Answer.undecided(NO_LAG)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L at a frequency, followed from zero frequency (rad)."""
        return phase_at(Axis(self._sampled), self._sampled, self._slow, self._rate, frequency)


def over_frequency(opening: SampledOpening) -> OpenLoop | None:
    """Return L over frequency; None where there is no L or its stability is not told."""
    transfer, slow = opening.transfer, opening.slow
    if transfer is None or slow is None or opening.stable is None:
        return None
    if transfer.rest is None:
        return RationalSampledLoop(transfer, slow, opening.period, stable=opening.stable)
    return EnclosedLoop(transfer, slow, position_constant(slow), opening.period, stable=opening.stable)
