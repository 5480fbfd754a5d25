"""A measure read once with the fixed decimal for pi and, where it matters, again with more digits."""

from __future__ import annotations

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.terms.enclosed import in_unit
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.unit import PI, PRECISE_PI, Unit

PI_DECIDES = "the answer depends on digits of pi beyond the 60th"


@record
class Reading:
    """Answers in coherent SI. `again` is the same object as `answer` where no constant with pi or dB comes into it."""

    answer: Answer
    again: Answer

    @staticmethod
    def once(answer: Answer) -> Reading:
        """Return the reading of something that does not depend on pi."""
        return Reading(answer, answer)

    @property
    def settled(self) -> Answer:
        """The answer, or an undecided one where more digits of pi change what kind of answer it is."""
        first, second = self.answer, self.again
        if first is second:
            return first
        if first.truth is not second.truth or (first.absent is None) is not (second.absent is None):
            return Answer.undecided(PI_DECIDES)
        return first

    def in_unit(self, unit: Unit) -> Answer:
        """Return the answer in `unit`; exact only where it stays the same with more digits of pi."""
        answer = self.settled
        if answer.absent is not None or answer.truth is not None:
            return answer
        exact = self._exactly(unit)
        if exact is not None:
            return Answer.of_exact(exact)
        first = in_unit(self.answer.enclose, unit)
        if self.again is self.answer:
            return Answer.of_ball(first, answer.fragile)
        second = in_unit(self.again.enclose, unit)
        return Answer.of_ball(lambda bits: _between(first(bits), second(bits), bits), answer.fragile)

    def _exactly(self, unit: Unit) -> fmpq | None:
        if self.answer.exact is None or self.again.exact is None or unit.kind == "decibel":
            return None
        value = self.answer.exact / unit.factor_with(PI)
        return value if value == self.again.exact / unit.factor_with(PRECISE_PI) else None


def _between(first: arb, second: arb, bits: int) -> arb:
    """Hull of both, widened by their distance: with 40 more digits of pi, the second is that much nearer the truth."""
    with working_precision(bits):
        return first.union(second) + arb(0, 1) * (first - second)
