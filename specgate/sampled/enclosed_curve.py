"""A transfer function in z whose coefficients are enclosed, over frequency: omega from 0 to pi/T.

The two ends are candidates of their own: at omega = 0 its value is rational or infinite, known from slow signals, at
pi/T it is real. Everything in between are roots of polynomials in x (`enclosed_axis`).
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property

from flint import arb, arb_poly, fmpq

from specgate.frequency.choose import Candidate, greatest
from specgate.frequency.questions import Range
from specgate.frequency.spots import Infinity, Sign
from specgate.frequency.values import root_of
from specgate.response.accounts import Account, Footing
from specgate.response.answers import Answer
from specgate.response.questions import Mask
from specgate.sampled.enclosed_axis import Axis, Balls, Crossed, Pick, Untold
from specgate.sampled.phase import phase_at
from specgate.sampled.sayings import GROUND
from specgate.sampled.scale import BEYOND, SampledScale, Tangent
from specgate.sampled.transfer import PulseTransfer
from specgate.sampled.within import within
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.verdicts import Proof

_Place = Crossed | Tangent
_FIRST = 192
"""Bits at which roots are isolated first."""


class EnclosedCurve:
    """slow: the transfer function of slow signals. at_one: its value at z = 1, None where it is infinite (exact)."""

    def __init__(self, transfer: PulseTransfer, slow: TransferFunction, at_one: fmpq | None, period: fmpq) -> None:
        self._transfer = transfer
        self._slow = slow
        self._at_one = at_one
        self._axis = Axis(transfer, unit_at_one=at_one is not None and abs(at_one) == 1)
        self._scale = SampledScale(period)

    # --- the ends -----------------------------------------------------------------------------------------

    @cached_property
    def _pole_at_end(self) -> bool:
        return bool(self._transfer.denominator(-1) == 0)

    @cached_property
    def _zero_at_end(self) -> bool:
        return bool(self._transfer.numerator(-1) == 0)

    def _at_end(self, bits: int) -> arb:
        """Return L(-1)."""
        precision = bits + 64
        while True:
            above, below = self._transfer.in_z(2 * precision)
            with working_precision(precision):
                value = above(arb(-1)) / below(arb(-1))
            if value.rel_accuracy_bits() >= bits or precision > HIGHEST or self._zero_at_end:
                return value
            precision *= 2

    def _compared_at_end(self, with_: int) -> Sign:
        """Return the sign of L(-1) minus a whole number. Raises Untold."""
        if self._zero_at_end:
            return -1 if with_ > 0 else int(with_ < 0)  # type: ignore[return-value]
        bits = 64
        while bits <= 1024:
            value = self._at_end(bits)
            if value > with_ or value < with_:
                return 1 if value > with_ else -1
            bits *= 2
        raise Untold("whether the open loop reaches one at half the sampling rate is not told")

    @cached_property
    def _end(self) -> Answer:
        return self._scale.frequency(Infinity())

    def _has_end(self, over: Range | None) -> bool:
        return over is None or self._scale.compare(Infinity(), over[1]) <= 0

    def _has_start(self, over: Range | None) -> bool:
        return over is None or over[0] == 0

    # --- in between ---------------------------------------------------------------------------------------

    def _roots(self, name: str, pick: Pick, over: Range | None) -> list[Crossed]:
        found = self._axis.roots(name, pick)
        if over is None:
            return list(found)
        return [one for one in found if self._compare(one, over[0]) >= 0 >= self._compare(one, over[1])]

    def _compare(self, place: Crossed, frequency: fmpq) -> int:
        if frequency == 0:
            return 1
        bits = 64
        while bits <= 1024:
            ball = self._frequency(place).enclose(bits)
            with working_precision(bits):
                difference = ball - arb(frequency)
            if difference > 0 or difference < 0:
                return 1 if difference > 0 else -1
            bits *= 2
        raise Untold("a crossing could not be told from an end of the range")

    def _frequency(self, place: _Place) -> Answer:
        return Answer(Proof.ENCLOSED, refine=lambda bits: self._scale.angle(place, bits))

    def _supremum(
        self,
        name: str,
        pick: Pick,
        of: tuple[Pick, Pick],
        start: Answer | None,
        end: Answer | None,
        over: Range | None,
    ) -> Answer:
        """Return the root of the greatest of a quotient over a range."""
        places: list[_Place] = list(self._roots(name, pick, over))
        if over is not None:
            places += [Tangent(f * self._scale.period / 2) for f in over if f > 0 and not self._scale.beyond(f)]
        found = [Candidate(self._axis.ratio(place, *of), {"frequency": self._frequency(place)}) for place in places]
        if start is not None and self._has_start(over):
            found.insert(0, Candidate(start, {"frequency": Answer.of_exact(0)}))
        if end is not None and self._has_end(over):
            found.append(Candidate(end, {"frequency": self._end}))
        best = greatest(found)
        if best is None:
            return Answer.nothing(BEYOND)
        return Candidate(root_of(best.value), best.at).answer

    def gain_at(self, frequency: fmpq) -> Answer:
        """Return |L| at a frequency."""
        if self._scale.beyond(frequency):
            return Answer.nothing(BEYOND)
        if frequency == 0:
            if self._at_one is None:
                return Answer.nothing("the gain is infinite at zero frequency", infinite=True)
            return Answer.of_exact(abs(self._at_one))
        return root_of(self._axis.ratio(Tangent(frequency * self._scale.period / 2), above, below))

    def phase_at(self, frequency: fmpq) -> Answer:
        """Return arg L at a frequency, followed from zero frequency (rad)."""
        return phase_at(self._axis, self._transfer, self._slow, self._scale, frequency)

    def within(self, mask: Mask) -> Answer:
        """Return whether the magnitude stays inside a mask over frequency."""
        return within(self._axis, self._scale, self._at_one, mask)

    def _account(self, method: str, name: str, pick: Pick) -> Callable[[], Account]:
        """Return how a number was proved that the roots of one of the polynomials tell."""

        def told_of() -> Account:
            count = len(self._axis.roots(name, pick))
            return Account(method, Footing(GROUND), brackets=count, counts={"bits at first": _FIRST})

        return told_of


def told(ask: Callable[[], Answer]) -> Answer:
    """Ask, and leave the question open where something on the way is not told."""
    try:
        return ask()
    except Untold as untold:
        return Answer.undecided(str(untold))


def squared(of: Callable[[int], arb]) -> Answer:
    """Return the square of a number in balls."""

    def refine(bits: int) -> arb:
        value = of(bits + 8)
        with working_precision(bits + 8):
            return value * value

    return Answer(Proof.ENCLOSED, refine=refine)


def above(balls: Balls) -> arb_poly:
    """Return |N|^2."""
    return balls.above


def below(balls: Balls) -> arb_poly:
    """Return |D|^2."""
    return balls.below


def sum_(balls: Balls) -> arb_poly:
    """Return |D + N|^2."""
    return balls.sum


def real(balls: Balls) -> arb_poly:
    """Return Re(N conj D)."""
    return balls.real


def imaginary(balls: Balls) -> arb_poly:
    """Return Im(N conj D)/v."""
    return balls.imaginary


def excess(balls: Balls) -> arb_poly:
    """Return |N|^2 - |D|^2."""
    return balls.excess


def still(balls: Balls) -> arb_poly:
    """Return what is zero where |N/D| stands still."""
    return balls.still


def sensitive(balls: Balls) -> arb_poly:
    """Return what is zero where |1 + N/D| stands still."""
    return balls.sensitive
