"""What approximations look at in a loop opened at a break: L over frequency, gain crossings, poles and zeros."""

from __future__ import annotations

from functools import cached_property

from flint import arb, fmpq

from specgate.approximations.spots import Spot, spots
from specgate.frequency.questions import Crossing, OpenLoop, Range
from specgate.measures.subjects import BreakSubject
from specgate.response.answers import Answer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record


@record
class HeldGain:
    """A loop whose only sampled block is a gain: L without sampling and hold, the period and the delay after it (s)."""

    rest: TransferFunction
    period: fmpq
    delay: fmpq


class OpenedLoop:
    """L at one declared break, and whether the loop closed again is stable.

    held: what a sampled loop is without its sampling; None of others, and of loops with more than a sampled gain.
    """

    def __init__(self, name: str, subject: BreakSubject, held: HeldGain | None = None) -> None:
        self.name, self.subject, self.held = name, subject, held

    @property
    def around(self) -> OpenedLoop:
        """Itself: what a rule for a loop looks at, whether it is asked about a break, a response or the whole loop."""
        return self

    @property
    def loop(self) -> OpenLoop | None:
        """L over frequency; None where this version does not answer that."""
        return self.subject.loop

    @property
    def stable(self) -> bool | None:
        """Whether the closed loop is stable, with every mode; None where that is not decided."""
        return self.subject.stable.truth

    @cached_property
    def transfer(self) -> TransferFunction | None:
        """L as written; None where it is not rational: with a dead time, or sampled."""
        found = self.subject.open_loop
        return found if isinstance(found, TransferFunction) else None

    @cached_property
    def late(self) -> tuple[TransferFunction, fmpq] | None:
        """The rational rest of L and the dead time (s) that is a factor of it; None of any other L."""
        found = self.subject.open_loop
        if not isinstance(found, DelayedTransfer) or not found.denominator.is_rational or not found.numerator:
            return None
        (dead_time, above), *more = found.numerator.terms
        return None if more or dead_time == 0 else (TransferFunction(above, found.denominator.undelayed), dead_time)

    @property
    def rest(self) -> TransferFunction | None:
        """L without the dead time that is a factor of it; None where L is no such product."""
        return self.transfer if self.late is None else self.late[0]

    @cached_property
    def poles(self) -> tuple[Spot, ...]:
        """The poles of L but for its dead time, common factors cancelled; none of an L that is no such product."""
        return () if self.rest is None else spots(self.rest.reduced().denominator)

    @cached_property
    def zeros(self) -> tuple[Spot, ...]:
        """The zeros of L but for its dead time, common factors cancelled; none of an L that is no such product."""
        return () if self.rest is None or not self.rest.numerator else spots(self.rest.reduced().numerator)

    @cached_property
    def gain_crossings(self) -> tuple[Crossing, ...]:
        """Where |L| = 1, by frequency."""
        return self.crossings()

    def crossings(self, over: Range | None = None) -> tuple[Crossing, ...]:
        """Return where |L| = 1, all or those in a range of frequencies."""
        every = () if self.loop is None else self.loop.crossings(over)
        return tuple(one for one in every if one.kind == "gain")


def lag(crossing: Crossing) -> Answer:
    """Return the lag (rad, 0 to 2 pi) that brings L to -1 at a gain crossing."""
    if crossing.direction == "lag":
        return crossing.margin

    def refine(bits: int) -> arb:
        ball = crossing.margin.enclose(bits)
        with working_precision(bits):
            return 2 * arb.pi() - ball

    return Answer.of_ball(refine)
