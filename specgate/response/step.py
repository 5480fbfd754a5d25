"""The response of a transfer function to a step: what is asked of it, and how it answers."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from flint import arb, fmpq, fmpq_poly

from specgate.response.answers import Answer
from specgate.systems.roots import Root, certified_roots
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

POLE_BITS = 128
"""Precision at which poles and zeros are shown; questions about the response refine them as needed."""

_NOT_SEARCHED = "the time search of this response is not answered by this version"


@dataclass(frozen=True)
class Extreme:
    """An extreme value and when it is taken; the time is absent where the value is only approached."""

    value: Answer
    time: Answer


class StepResponse:
    """Response y(t), t > 0, of numerator/denominator to a step of `size` at t = 0, as deviation from rest.

    The fraction is reduced on construction; all quantities are coherent SI. Every question is answered once and
    kept. Raises ValueError for an improper fraction or a zero denominator.
    """

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> None:
        reduced = TransferFunction(numerator, denominator).reduced()
        if not reduced.proper:
            raise ValueError("an improper transfer function has no step response")
        self.numerator: fmpq_poly = reduced.numerator
        self.denominator: fmpq_poly = reduced.denominator
        self.size = size

    @cached_property
    def poles(self) -> tuple[Root, ...]:
        """Certified poles of the reduced fraction, with multiplicities (1/s)."""
        return certified_roots(self.denominator, POLE_BITS)

    @cached_property
    def zeros(self) -> tuple[Root, ...]:
        """Certified zeros of the reduced fraction, with multiplicities (1/s); none for a zero response."""
        return certified_roots(self.numerator, POLE_BITS) if self.numerator.degree() > 0 else ()

    @cached_property
    def settles(self) -> bool:
        """Whether all poles lie strictly left of the imaginary axis, decided exactly."""
        return self.denominator.degree() == 0 or is_hurwitz(self.denominator)

    def initial_value(self) -> Answer:
        """Return y(0+), the jump: exact."""
        jump = self.numerator[self.denominator.degree()] / self.denominator.leading_coefficient()
        return Answer.of_exact(jump * self.size)

    def final_value(self) -> Answer:
        """Return the limit of y for large t: exact, or the reason why there is none."""
        if not self.settles:
            return Answer.nothing("the response does not settle")
        return Answer.of_exact(self.numerator[0] / self.denominator[0] * self.size)

    def greatest(self) -> Extreme:
        """Return sup y over t > 0, the jump and values that are only approached included."""
        return self._unsearched()

    def least(self) -> Extreme:
        """Return inf y over t > 0, the jump and values that are only approached included."""
        return self._unsearched()

    def peak_deviation(self) -> Extreme:
        """Return sup |y| over t > 0."""
        return self._unsearched()

    def settling(self, distance: fmpq) -> Answer:
        """Return the least T with |y(t) - final| <= distance for all t >= T (s). Raises ValueError unless > 0."""
        if distance <= 0:
            raise ValueError("a settling band needs a positive half-width")
        return self.final_value() if not self.settles else Answer.undecided(_NOT_SEARCHED)

    def first_arrival(self, level: fmpq) -> Answer:
        """Return the first t with y(t) >= level, or <= level where the level is negative (s)."""
        return self.final_value() if not self.settles else Answer.undecided(_NOT_SEARCHED)

    def enclose(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball that contains y(time) for time > 0 (y(0+) at 0), computed with `bits` of precision."""
        raise NotImplementedError

    def curve(self, points: int = 400) -> tuple[tuple[fmpq, arb], ...]:
        """Return at most `points` pairs (time, value) for drawing, in order of time."""
        raise NotImplementedError

    @staticmethod
    def _unsearched() -> Extreme:
        return Extreme(Answer.undecided(_NOT_SEARCHED), Answer.undecided(_NOT_SEARCHED))
