"""A channel of a sampled loop over frequency: at its samples, up to half the sampling rate."""

from __future__ import annotations

from dataclasses import replace
from functools import cached_property

from flint import arb_poly, fmpq

from specgate.frequency.choose import Candidate, least
from specgate.frequency.fall import square_of_factor
from specgate.frequency.questions import Range
from specgate.frequency.rational_gain import UNSTABLE
from specgate.frequency.values import quotient
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.sampled.channel import SampledChannel
from specgate.sampled.components import UNTOLD
from specgate.sampled.enclosed_axis import Balls
from specgate.sampled.enclosed_curve import EnclosedCurve, above, below, squared, still, told
from specgate.sampled.pulse import pulse_transfer
from specgate.terms.precision import working_precision

_AT_ZERO = "the gain at zero frequency is {}: there is nothing to be measured from"
_NEVER = "the gain never falls 3 dB below that at zero frequency, up to half the sampling rate (pi/T)"
_GROWS = "a mode of the channel does not decay: what it is over frequency is not answered in a sampled loop"


class SampledGain(EnclosedCurve):
    """G(z) of a channel from one source with a sampled block on the way (see `pulse`)."""

    def __init__(self, found: SampledChannel) -> None:
        (source,) = found.sources
        slow = found.slow(source).reduced()
        order = slow.order_at_origin if slow.numerator else 1
        self._stable = found.stable
        super().__init__(
            pulse_transfer(found),
            slow,
            fmpq(0) if order > 0 else slow.value_at_origin if order == 0 else None,
            found.solution.period,
        )

    @cached_property
    def _missing(self) -> Answer | None:
        if self._stable:
            return None
        if self._stable is None:
            return Answer.undecided(UNTOLD)
        return Answer.undecided(_GROWS) if self._slow.poles_at_origin else Answer.nothing(UNSTABLE)

    @cached_property
    def _unreferred(self) -> Answer | None:
        """Why nothing can be measured from the gain at zero frequency; None where it can."""
        if self._at_one is None:
            return Answer.nothing(_AT_ZERO.format("infinite"))
        if self._missing is not None:
            return self._missing
        return Answer.nothing(_AT_ZERO.format("zero")) if self._at_one == 0 else None

    def bandwidth(self) -> Answer:
        """Return the first frequency at which the gain falls 3 dB, 10^(-3/20), below that at zero frequency."""
        return self._unreferred or told(self._first_fall)

    def _first_fall(self) -> Answer:
        found = self._roots("fallen", self._fallen, None)
        first = least(Candidate(self._frequency(one), {}) for one in found)
        if first is None:
            return Answer.nothing(_NEVER)
        return replace(first.value, at=None).accounted(self._account(_FALL, "fallen", self._fallen))

    def _fallen(self, balls: Balls) -> arb_poly:
        """Return |N|^2 - 10^(-3/10) |G(1)|^2 |D|^2: a root of it lies where the gain has fallen so far."""
        assert self._at_one is not None
        factor = square_of_factor(balls.bits)
        with working_precision(balls.bits):
            return balls.above - balls.below * (factor * self._at_one**2)

    def resonance_peak(self, over: Range | None = None) -> Answer:
        """Return sup of the gain over that at zero frequency; `at` has the frequency."""
        if self._unreferred is not None or self._at_one is None:
            return self._unreferred or Answer.nothing(_NEVER)
        at_zero = abs(self._at_one)
        return told(lambda: self._relative(self._greatest(over), at_zero))

    def _greatest(self, over: Range | None) -> Answer:
        assert self._at_one is not None
        start = Answer.of_exact(self._at_one**2)
        end = None if self._pole_at_end else squared(self._at_end)
        return self._supremum("still", still, (above, below), start, end, over)

    def _relative(self, peak: Answer, at_zero: fmpq) -> Answer:
        if peak.absent is not None:
            return peak
        if peak.exact is not None:
            return replace(Answer.of_exact(peak.exact / at_zero), at=peak.at)
        found = replace(quotient(peak, Answer.of_exact(at_zero)), at=peak.at)
        return found.accounted(self._account(_STILL, "still", still))

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return the gain."""
        return self._missing or super().gain_at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return the phase, followed from zero frequency (rad)."""
        return self._missing or super().phase_at(frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether the gain stays inside a mask over frequency; `at` names the first violation."""
        return self._missing or super().within(mask)


_FALL = (
    "all points where the squared gain is 10^(-3/10) of that at zero frequency, isolated in balls; the first of them"
)
_STILL = "all points where the gain stands still, isolated in balls, and both ends; the greatest of them"
