"""A response that is smooth piece by piece: every question over time, answered by way of its pieces alone."""

from __future__ import annotations

from functools import cached_property, reduce

from flint import arb, fmpq

from specgate.response.answers import Absent, Answer
from specgate.response.extremes import Extreme, greater, mirrored
from specgate.response.pieces import Pieces
from specgate.response.piecewise.areas import LASTING, Areas
from specgate.response.piecewise.climbing import value_at
from specgate.response.piecewise.heights import Heights
from specgate.response.piecewise.instants import first_arrival, settling
from specgate.response.piecewise.masking import within
from specgate.response.piecewise.outline import outline
from specgate.response.piecewise.patches import LOOK, Ground
from specgate.response.piecewise.recording import (
    FIRST,
    FURTHEST,
    GREATEST,
    INSTANT,
    LAST,
    LIMITS,
    STEEPEST,
    accounted,
    with_account,
)
from specgate.response.piecewise.unsettled import unsettled_extreme
from specgate.response.questions import Mask
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

_UNSETTLED = "the greatest rate of a response that does not settle is not searched where it has kinks"
_KINKS = 4000
"""Kinks at which a jump is looked for where it is not told that there are no more."""

JUMPS = "the response jumps: its rate is without limit"

_UNTOLD = "whether the response jumps at a kink is not told"


class PiecewiseResponse:
    """Response y(t), t > 0, as its pieces say it is (see `specgate.response.questions.TimeResponse`)."""

    def __init__(self, pieces: Pieces) -> None:
        self.pieces = pieces
        self._ground = Ground(pieces)
        self._settling: dict[fmpq, Answer] = {}
        self._arrivals: dict[fmpq, Answer] = {}
        self._deviations: dict[fmpq, Extreme] = {}
        self._masks: dict[Mask, Answer] = {}

    @cached_property
    def settles(self) -> bool:
        """Whether y tends to a constant."""
        return not isinstance(self.pieces.final, Absent)

    def initial_value(self) -> Answer:
        """Return y(0+)."""
        jump = self.pieces.jump(0)
        if jump is not None:
            return Answer.of_exact(jump)
        return with_account(
            Answer.of_ball(lambda bits: value_at(self.pieces, 0, 0, fmpq(0), bits)), self._ground, INSTANT
        )

    def final_value(self) -> Answer:
        """Return the limit of y for large t: exact, or the reason why there is none."""
        final = self.pieces.final
        if isinstance(final, Absent):
            return Answer(Proof.EXACT if final.proved else Proof.ESTIMATED, absent=final)
        return Answer.of_exact(final)

    @cached_property
    def _final(self) -> fmpq:
        final = self.pieces.final
        if isinstance(final, Absent):
            raise ValueError("a response that does not settle has no final value")
        return final

    @cached_property
    def _heights(self) -> Heights:
        return Heights(self._ground, self._final)

    def greatest(self) -> Extreme:
        """Return sup y over t > 0, jumps and values that are only approached included."""
        return self._highest

    def least(self) -> Extreme:
        """Return inf y over t > 0, jumps and values that are only approached included."""
        return self._lowest

    @cached_property
    def _highest(self) -> Extreme:
        return self._supremum(1)

    @cached_property
    def _lowest(self) -> Extreme:
        return self._supremum(-1)

    def _supremum(self, sign: int) -> Extreme:
        if not self.settles:
            return accounted(unsettled_extreme(self._ground, sign), self._ground, GREATEST)
        return accounted(self._heights.supremum(sign), self._ground, GREATEST, self._final)

    def peak_deviation(self) -> Extreme:
        """Return sup |y| over t > 0, jumps and values that are only approached included."""
        return self._peak

    @cached_property
    def _peak(self) -> Extreme:
        return greater(self._highest, mirrored(self._lowest))

    def settling(self, distance: fmpq) -> Answer:
        """Return the least T with |y(t) - final| <= distance for all t >= T (s). Raises ValueError unless > 0."""
        if distance <= 0:
            raise ValueError("a settling band needs a positive half-width")
        if not self.settles:
            return self.final_value()
        if distance not in self._settling:
            found = settling(self._ground, self._final, distance)
            since = self.pieces.settled_by(distance)
            self._settling[distance] = with_account(found, self._ground, LAST, 1, since)
        return self._settling[distance]

    def first_arrival(self, level: fmpq) -> Answer:
        """Return the first t > 0 with y(t) >= level, or <= level where the level is negative (s)."""
        if not self.settles:
            return self.final_value()
        if level not in self._arrivals:
            found = first_arrival(self._ground, self._final, level, self._heights.size)
            self._arrivals[level] = with_account(found, self._ground, FIRST, 1)
        return self._arrivals[level]

    def enclose(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball that contains y(time); at a jump the value just after it."""
        if isinstance(time, fmpq):
            jump = self.pieces.jump(0) if time == 0 else None
            if jump is not None:
                return Answer.of_exact(jump).enclose(bits)
            return value_at(self.pieces, self._ground.index(time), 0, time, bits)
        first, last = (self._ground.index(max(fmpq(0), end.fmpq())) for end in (time.lower(), time.upper()))
        with working_precision(bits):
            return self._over(time, first, last, bits)

    def value_at(self, time: fmpq) -> Answer:
        """Return y(time), at a jump the value just after it: exact where that piece is a rational polynomial."""
        index = self._ground.index(time)
        polynomial, begin = self.pieces.polynomial(index), self.pieces.kink(index)
        if polynomial is not None and begin is not None:
            return Answer.of_exact(polynomial(time - begin))
        return with_account(Answer.of_ball(lambda bits: self.enclose(time, bits)), self._ground, INSTANT)

    def _over(self, time: arb, first: int, last: int, bits: int) -> arb:
        """Return a ball of y over a ball of times that may reach over several pieces."""
        if first == last:
            return self.pieces.derivatives(first, time, max(LOOK, bits))[0]
        low, high = max(fmpq(0), time.lower().fmpq()), time.upper().fmpq()
        values = []
        for index in range(first, last + 1):
            begin, end = self.pieces.kink(index), self.pieces.kink(index + 1)
            left = low if begin is None else max(low, begin)
            part = arb(left).union(arb(high if end is None else min(high, end)))
            values.append(self.pieces.derivatives(index, part, max(LOOK, bits))[0])
        return reduce(lambda one, other: one.union(other), values)

    def deviation_after(self, time: fmpq) -> Extreme:
        """Return sup over t >= time of |y(t) - final|, and where it is."""
        if not self.settles:
            return Extreme(self.final_value(), self.final_value())
        if time not in self._deviations:
            found = self._heights.deviation(time)
            self._deviations[time] = accounted(found, self._ground, FURTHEST, fmpq(0))
        return self._deviations[time]

    def peak_rate(self) -> Extreme:
        """Return sup |dy/dt| over t > 0, infinite where y jumps, and when it is first taken."""
        return self._rate

    @cached_property
    def _rate(self) -> Extreme:
        jump = self._first_jump()
        if jump is not None:
            return jump
        if not self.settles:
            slope = self.pieces.slope()
            return Extreme.undecided(_UNSETTLED) if slope is None else PiecewiseResponse(slope).peak_deviation()
        return accounted(self._heights.rate(), self._ground, STEEPEST)

    def _first_jump(self) -> Extreme | None:
        """Return the infinite rate at the first jump, None where y does not jump."""
        smooth = self.pieces.continuous_from()
        for index, begin, _ in self._ground.kinks(smooth):
            if index >= _KINKS:
                return Extreme.undecided(_UNTOLD)
            jumps = self._jumps(index, begin)
            if jumps is None:
                return Extreme.undecided(_UNTOLD)
            if jumps:
                return Extreme(Answer.nothing(JUMPS, infinite=True), Answer.of_exact(begin))
        return None

    def _jumps(self, index: int, begin: fmpq) -> bool | None:
        known = self.pieces.jump(index)
        if known is not None:
            return known != 0
        after = value_at(self.pieces, index, 0, begin, 256)
        before = value_at(self.pieces, index - 1, 0, begin, 256) if index else arb(0)
        return None if after.overlaps(before) else True

    def within(self, mask: Mask) -> Answer:
        """Return whether y stays inside; `at` has `time`, `value` and `limit` of the first violation (an infimum)."""
        if mask not in self._masks:
            final = self._final if self.settles else None
            size = self._heights.size if self.settles else fmpq(1)
            self._masks[mask] = with_account(within(self._ground, mask, final, size), self._ground, LIMITS)
        return self._masks[mask]

    def absolute_integral(self) -> Answer:
        """Return the integral of |y| over t > 0, or the reason why there is none."""
        return self._absolute

    @cached_property
    def _absolute(self) -> Answer:
        return self._areas.absolute() if self._vanishes else self._lasts()

    def squared_integral(self) -> Answer:
        """Return the integral of y^2 over t > 0, or the reason why there is none."""
        return self._squared

    @cached_property
    def _squared(self) -> Answer:
        return self._areas.squared() if self._vanishes else self._lasts()

    @cached_property
    def _vanishes(self) -> bool:
        return self.settles and self._final == 0

    def _lasts(self) -> Answer:
        return Answer.nothing(LASTING) if self.settles else self.final_value()

    @cached_property
    def _areas(self) -> Areas:
        return Areas(self._ground, self._heights.size)

    def curve(self, points: int = 400) -> tuple[tuple[fmpq, arb], ...]:
        """Return at most `points` pairs (time, ball of y) for drawing, all extremes and asked crossings among them."""
        answers = [*self._settling.values(), *self._arrivals.values()]
        if self.settles:
            answers += [self._highest.time, self._lowest.time]
        balls = [answer.enclose(64) for answer in answers if answer.absent is None]
        size = self._heights.size if self.settles else None
        return outline(self._ground, size, [ball.mid().fmpq() for ball in balls], points)
