"""A channel of a closed loop with dead time over frequency."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property

from flint import arb, fmpq

from specgate.delays.magnitude import DelayedMagnitude
from specgate.delays.masks import first_below, late_inside
from specgate.delays.phase import late_phase
from specgate.delays.recording import AXIS, FALL
from specgate.delays.squared_gain import SquaredGain
from specgate.frequency.fall import square_of_factor
from specgate.frequency.questions import Range
from specgate.frequency.rational_gain import UNSTABLE, RationalGain
from specgate.frequency.values import quotient
from specgate.response.accounts import Account
from specgate.response.answers import Absent, Answer
from specgate.response.budget import OutOfWork
from specgate.response.pieces import Pieces
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import Mask
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi_stability import is_stable
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

_AT_ZERO = "the gain at zero frequency is {}: there is nothing to be measured from"
_BITS = (64, 128, 256)


class _Fall(Pieces):
    """By how much the square of a gain is below that at zero frequency."""

    def __init__(self, gain: SquaredGain, at_zero: fmpq) -> None:
        self._gain, self._at_zero = gain, at_zero

    @property
    def final(self) -> fmpq | Absent:
        """What it tends to."""
        limit = self._gain.final
        return limit if isinstance(limit, Absent) else self._at_zero - limit

    def kink(self, index: int) -> fmpq | None:
        """Return 0 for the only piece."""
        return self._gain.kink(index)

    def jump(self, index: int) -> fmpq | None:
        """Return 0: it begins with nothing."""
        return fmpq(0)

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of it and its derivatives over a ball of frequencies."""
        value, first, second, third = self._gain.derivatives(index, time, bits)
        with working_precision(bits + 32):
            return arb(self._at_zero) - value, -first, -second, -third

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a frequency from which on it is within a distance of its limit."""
        return self._gain.settled_by(distance)

    def speed(self, index: int) -> float:
        """Return a hint of the lowest frequency at which anything happens."""
        return self._gain.speed(index)


class DelayedGain:
    """G = transfer; a pole right of the axis leaves no answer."""

    def __init__(self, transfer: DelayedTransfer) -> None:
        self.transfer = transfer
        self._magnitude = DelayedMagnitude(transfer.numerator, transfer.denominator)

    @cached_property
    def _undelayed(self) -> RationalGain | None:
        """The channel without its dead time, where that is a factor of it: it has the same magnitude."""
        above = self.transfer.numerator.terms
        if len(above) != 1 or not self.transfer.denominator.is_rational:
            return None
        return RationalGain(TransferFunction(above[0][1], self.transfer.denominator.undelayed))

    @cached_property
    def _missing(self) -> Answer | None:
        stable = is_stable(self.transfer.denominator)
        if stable:
            return None
        if stable is None:
            return Answer.undecided("whether the channel is stable was not decided")
        return Answer.nothing(UNSTABLE)

    @cached_property
    def _unreferred(self) -> Answer | None:
        """Why nothing can be measured from the gain at zero frequency; None where it can."""
        if self._missing is not None:
            return self._missing
        if not self.transfer.numerator or self.transfer.order_at_origin > 0:
            return Answer.nothing(_AT_ZERO.format("zero"))
        return Answer.nothing(_AT_ZERO.format("infinite")) if self.transfer.order_at_origin < 0 else None

    def bandwidth(self) -> Answer:
        """Return the first frequency at which the gain falls 3 dB, 10^(-3/20), below that at zero frequency."""
        if self._undelayed is not None:
            return self._undelayed.bandwidth()
        return self._unreferred or self._bandwidth

    @cached_property
    def _bandwidth(self) -> Answer:
        """The first arrival at 10^(-3/20) of the gain at zero frequency: between those at rationals on either side."""
        between = self._falls()
        first, last = between(_BITS[0])
        for found in (first, last):
            if found.absent is not None:
                proved = found.absent.proved
                never = "the gain never falls 3 dB below that at zero frequency"
                return Answer.nothing(never) if proved else found

        def refine(bits: int) -> arb:
            precision = next((one for one in _BITS if one >= bits + 16), _BITS[-1])
            early, late = (one.enclose(precision) for one in between(precision))
            with working_precision(precision):
                return early.union(late)

        return Answer.of_ball(refine, first.fragile).accounted(lambda: Account(FALL, AXIS))

    def _falls(self) -> Callable[[int], tuple[Answer, Answer]]:
        """Return where the gain first falls below 3 dB rounded up, and rounded down, for a number of bits.

        The square is searched like a response; where it tends to no limit, like a gain above a lower limit for ever.
        """
        at_zero = abs(self.transfer.value_at_origin)
        square = at_zero * at_zero
        fall: PiecewiseResponse | None
        try:
            gain = SquaredGain(self.transfer.numerator, self.transfer.denominator)
            fall = PiecewiseResponse(_Fall(gain, square))
        except OutOfWork:
            fall = None

        def between(bits: int) -> tuple[Answer, Answer]:
            factor = square_of_factor(bits)
            if fall is not None:
                early, late = (square * (1 - end.fmpq()) for end in (factor.upper(), factor.lower()))
                return fall.first_arrival(early), fall.first_arrival(late)
            with working_precision(bits):
                level = factor.sqrt() * at_zero
            return first_below(self.transfer, level.upper().fmpq()), first_below(self.transfer, level.lower().fmpq())

        return between

    def resonance_peak(self, over: Range | None = None) -> Answer:
        """Return sup of the gain over that at zero frequency; `at` has the frequency."""
        if self._undelayed is not None:
            return self._undelayed.resonance_peak(over)
        if self._unreferred is not None:
            return self._unreferred
        peak = self._magnitude.supremum(over)
        if peak.absent is not None:
            return peak
        scaled = quotient(peak, Answer.of_exact(abs(self.transfer.value_at_origin)))
        return Answer(
            scaled.proof, scaled.truth, scaled.exact, scaled.refine, at=peak.at, fragile=peak.fragile, how=peak.how
        )

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return the gain."""
        if self._undelayed is not None:
            return self._undelayed.gain_at(frequency)
        return self._missing or self._magnitude.at(frequency)

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return the phase, followed from zero frequency (rad)."""
        return self._missing or late_phase(self.transfer, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether the gain stays inside a mask over frequency; `at` names the first violation."""
        if self._undelayed is not None:
            return self._undelayed.within(mask)
        return self._missing or late_inside(self.transfer, mask)
