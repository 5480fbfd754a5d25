"""A rational channel of a closed loop over frequency."""

from __future__ import annotations

from dataclasses import replace
from functools import cached_property

from flint import fmpq

from specgate.frequency.axis import AxisFunction
from specgate.frequency.fall import first_fall
from specgate.frequency.magnitude import Magnitude
from specgate.frequency.masks import inside
from specgate.frequency.phase import phase_at
from specgate.frequency.questions import Range
from specgate.frequency.recording import ANGLES, FALL, SIDES, of_values
from specgate.frequency.scale import Continuous
from specgate.frequency.values import root_of
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.systems.stability import classify
from specgate.systems.transfer import TransferFunction

UNSTABLE = "the channel has a growing mode: a sine at its input leads to no sine at its output"
_AT_ZERO = "the gain at zero frequency is {}: there is nothing to be measured from"


class RationalGain:
    """G = numerator/denominator; a pole right of the axis leaves no answer."""

    def __init__(self, channel: TransferFunction) -> None:
        self._channel = channel
        self._scale = Continuous()

    @cached_property
    def axis(self) -> AxisFunction:
        """The channel on the axis."""
        return AxisFunction(self._channel)

    @cached_property
    def _missing(self) -> Answer | None:
        return Answer.nothing(UNSTABLE) if classify(self.axis.denominator).right else None

    @cached_property
    def _unreferred(self) -> Answer | None:
        """Why nothing can be measured from the gain at zero frequency; None where it can."""
        if self._missing is not None:
            return self._missing
        if self.axis.denominator[0] == 0:
            return Answer.nothing(_AT_ZERO.format("infinite"))
        return Answer.nothing(_AT_ZERO.format("zero")) if self.axis.numerator[0] == 0 else None

    @cached_property
    def _magnitude(self) -> Magnitude:
        return Magnitude(self.axis.above, self.axis.below, self._scale)

    @cached_property
    def _bandwidth(self) -> Answer:
        found = first_fall(self.axis.above, self.axis.below)
        if found.absent is not None:
            return found
        return replace(root_of(found), fragile=found.fragile).accounted(lambda: of_values(FALL, self._scale))

    def bandwidth(self) -> Answer:
        """Return the first frequency at which the gain falls 3 dB, 10^(-3/20), below that at zero frequency."""
        return self._unreferred or self._bandwidth

    def resonance_peak(self, over: Range | None = None) -> Answer:
        """Return sup of the gain over that at zero frequency; `at` has the frequency."""
        if self._unreferred is not None:
            return self._unreferred
        above, below = self.axis.above, self.axis.below
        return Magnitude(above * below[0], below * above[0], self._scale).supremum(over)

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return the gain."""
        return self._missing or self._magnitude.at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return the phase, followed from zero frequency (rad)."""
        found = self._missing or phase_at(self.axis, frequency)
        return found.accounted(lambda: of_values(ANGLES, self._scale))

    def within(self, mask: Mask) -> Answer:
        """Return whether the gain stays inside a mask over frequency; `at` names the first violation."""
        found = self._missing or inside(self.axis.above, self.axis.below, mask)
        return found.accounted(lambda: of_values(SIDES, self._scale))
