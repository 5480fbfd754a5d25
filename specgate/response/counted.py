"""A response whose times are counted from later than the start of its input: from the end of a ramp that is held."""

from __future__ import annotations

from dataclasses import replace

from flint import arb, fmpq

from specgate.response.answers import Answer, Fragile
from specgate.response.extremes import Extreme
from specgate.response.modes import GUARD
from specgate.response.questions import Mask, Points, TimeResponse
from specgate.terms.precision import working_precision


class Counted(TimeResponse):
    """The same response with every time counted from `since` (s) on; what happens before it is at a negative time.

    A response that is settled before `since` has a settling time of zero.
    """

    def __init__(self, response: TimeResponse, since: fmpq) -> None:
        self.counted = response
        self.since = since

    @property
    def settles(self) -> bool:
        """Whether y tends to a constant."""
        return self.counted.settles

    def initial_value(self) -> Answer:
        """Return the value just after the start of the input."""
        return self.counted.initial_value()

    def final_value(self) -> Answer:
        """Return the limit of y for large t."""
        return self.counted.final_value()

    def greatest(self) -> Extreme:
        """Return sup y over all time."""
        return self._moved(self.counted.greatest())

    def least(self) -> Extreme:
        """Return inf y over all time."""
        return self._moved(self.counted.least())

    def peak_deviation(self) -> Extreme:
        """Return sup |y| over all time."""
        return self._moved(self.counted.peak_deviation())

    def settling(self, distance: fmpq) -> Answer:
        """Return the least T >= 0 with |y(t) - final| <= distance for all t >= T (s)."""
        settled = self._earlier(self.counted.settling(distance))
        if settled.exact is not None:
            return replace(settled, exact=max(settled.exact, fmpq(0)))
        if settled.refine is None:
            return settled
        return replace(settled, refine=lambda bits: settled.enclose(bits).max(arb(0)))

    def first_arrival(self, level: fmpq) -> Answer:
        """Return the first time with y(t) >= level, or <= level where the level is negative (s)."""
        return self._earlier(self.counted.first_arrival(level))

    def enclose(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball that contains y(time)."""
        if isinstance(time, fmpq):
            return self.counted.enclose(time + self.since, bits)
        with working_precision(bits + GUARD):
            later = time + self.since
        return self.counted.enclose(later, bits)

    def value_at(self, time: fmpq) -> Answer:
        """Return y(time)."""
        return self.counted.value_at(time + self.since)

    def deviation_after(self, time: fmpq) -> Extreme:
        """Return sup over t >= time of |y(t) - final|."""
        return self._moved(self.counted.deviation_after(time + self.since))

    def peak_rate(self) -> Extreme:
        """Return sup |dy/dt| over all time."""
        return self._moved(self.counted.peak_rate())

    def within(self, mask: Mask) -> Answer:
        """Return whether y stays inside a mask whose times count from `since` as well."""
        moved = Mask(self._later(mask.upper), self._later(mask.lower), mask.forever)
        answer = self.counted.within(moved)
        if answer.at is None:
            return answer
        at = {
            name: self._earlier(value) if name == "time" and isinstance(value, Answer) else value
            for name, value in answer.at.items()
        }
        return replace(answer, at=at)

    def absolute_integral(self) -> Answer:
        """Return the integral of |y| over all time."""
        return self.counted.absolute_integral()

    def squared_integral(self) -> Answer:
        """Return the integral of y^2 over all time."""
        return self.counted.squared_integral()

    def curve(self, points: int = 400) -> tuple[tuple[fmpq, arb], ...]:
        """Return at most `points` pairs (time, ball of y) for drawing."""
        return tuple((time - self.since, value) for time, value in self.counted.curve(points))

    def _later(self, points: Points) -> Points:
        return tuple((time + self.since, limit) for time, limit in points)

    def _moved(self, extreme: Extreme) -> Extreme:
        return Extreme(extreme.value, self._earlier(extreme.time))

    def _earlier(self, time: Answer) -> Answer:
        """Return a time counted from `since`."""
        fragile = time.fragile
        if fragile is not None and fragile.other is not None:
            other = Answer.of_ball(fragile.other)
            fragile = Fragile(fragile.reason, lambda bits: self._difference(other, bits))
        if time.exact is not None:
            return replace(time, exact=time.exact - self.since, fragile=fragile)
        if time.refine is None:
            return time
        return replace(time, refine=lambda bits: self._difference(time, bits), fragile=fragile)

    def _difference(self, time: Answer, bits: int) -> arb:
        ball = time.enclose(bits)
        with working_precision(bits + GUARD):
            return ball - arb(self.since)
