"""A sampled loop opened at a break, over frequency: exactly where L(z) is rational, else in balls."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from flint import fmpq

from specgate.frequency.questions import OpenLoop, Range
from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.sampled.delay_margin import delay_margin
from specgate.sampled.enclosed_axis import Axis
from specgate.sampled.enclosed_loop import EnclosedLoop, delay_stood
from specgate.sampled.opened import SampledOpening
from specgate.sampled.phase import phase_at
from specgate.sampled.scale import BEYOND, SampledScale
from specgate.sampled.transfer import PulseTransfer
from specgate.sampled.within import within
from specgate.systems.error_constants import position_constant
from specgate.systems.transfer import TransferFunction


class RationalSampledLoop(RationalLoop):
    """L(z) with rational coefficients: a rational function of w, whose frequencies end at pi/T."""

    def __init__(
        self,
        transfer: PulseTransfer,
        slow: TransferFunction,
        period: fmpq,
        late: Callable[[], Answer] | None,
        *,
        stable: bool,
    ) -> None:
        scale = SampledScale(period)
        super().__init__(TransferFunction(*transfer.exact_in_w()), stable, scale)
        self._sampled, self._slow, self._rate = transfer, slow, scale
        self._late = late

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L| at a frequency."""
        return Answer.nothing(BEYOND) if self._rate.beyond(frequency) else super().gain_at(frequency)

    def delay_margin(self, over: Range | None = None) -> Answer:
        """Return the least dead time that makes the loop unstable; it belongs to no frequency."""
        return delay_stood(self._late, over, stable=self.stable)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L at a frequency, followed from zero frequency (rad)."""
        return phase_at(Axis(self._sampled), self._sampled, self._slow, self._rate, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether |L| stays inside a mask over frequency."""
        return within(Axis(self._sampled), self._rate, position_constant(self._slow), mask)


def over_frequency(opening: SampledOpening) -> OpenLoop | None:
    """Return L over frequency; None where there is no L or its stability is not told."""
    component = opening.component
    transfer, slow = opening.transfer, opening.slow
    if transfer is None or slow is None or opening.stable is None:
        return None
    at_one = position_constant(slow)
    late = None if component is None else partial(delay_margin, component, unit_at_one=at_one == 1)
    if transfer.rest is None:
        return RationalSampledLoop(transfer, slow, opening.period, late, stable=opening.stable)
    return EnclosedLoop(transfer, slow, at_one, opening.period, late, stable=opening.stable)
