"""The response of a transfer function to a step: what is asked of it, and how it answers."""

from __future__ import annotations

from functools import cached_property

from flint import arb, fmpq, fmpq_poly

from specgate.response.answers import Answer
from specgate.response.course import Course
from specgate.response.curve import points as curve_points
from specgate.response.curve import settled_window, unsettled_window
from specgate.response.extremes import Extreme, greater, mirrored
from specgate.response.piecewise.areas import LASTING
from specgate.response.piecewise.response import JUMPS, PiecewiseResponse
from specgate.response.questions import Mask
from specgate.response.record import modal_account
from specgate.response.settling import first_arrival, settling
from specgate.response.superposed import Superposed
from specgate.response.superposed.waves import StepWave
from specgate.response.supremum import highest
from specgate.response.unsettled import unsettled_extreme
from specgate.systems.energy import energy
from specgate.systems.roots import Root, certified_roots
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction

__all__ = ["Extreme", "StepResponse"]

POLE_BITS = 128
"""Precision at which poles and zeros are shown; questions about the response refine them as needed."""


class StepResponse:
    """Response y(t), t > 0, of numerator/denominator to a step of `size` at t = 0, as deviation from rest.

    The fraction is reduced on construction; all quantities are coherent SI. Every question is answered once and
    kept. Raises ValueError for an improper fraction.
    """

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> None:
        reduced = TransferFunction(numerator, denominator).reduced()
        if not reduced.proper:
            raise ValueError("an improper transfer function has no step response")
        self.numerator: fmpq_poly = reduced.numerator
        self.denominator: fmpq_poly = reduced.denominator
        self.size = size
        self._settling: dict[fmpq, Answer] = {}
        self._arrivals: dict[fmpq, Answer] = {}

    @cached_property
    def poles(self) -> tuple[Root, ...]:
        """Certified poles of the reduced fraction, with multiplicities (1/s)."""
        return certified_roots(self.denominator, POLE_BITS) if self.denominator.degree() > 0 else ()

    @cached_property
    def zeros(self) -> tuple[Root, ...]:
        """Certified zeros of the reduced fraction, with multiplicities (1/s); none for a zero response."""
        return certified_roots(self.numerator, POLE_BITS) if self.numerator.degree() > 0 else ()

    @cached_property
    def settles(self) -> bool:
        """Whether all poles lie strictly left of the imaginary axis, decided exactly."""
        return is_hurwitz(self.denominator)

    @cached_property
    def _jump(self) -> fmpq:
        return self.numerator[self.denominator.degree()] / self.denominator.leading_coefficient() * self.size

    @cached_property
    def _moves(self) -> bool:
        return self.denominator.degree() > 0 and bool(self.numerator) and self.size != 0

    @cached_property
    def _course(self) -> Course:
        return Course(self.numerator, self.denominator, self.size)

    def initial_value(self) -> Answer:
        """Return y(0+), the jump: exact."""
        return Answer.of_exact(self._jump)

    def final_value(self) -> Answer:
        """Return the limit of y for large t: exact, or the reason why there is none."""
        if not self.settles:
            return Answer.nothing("the response does not settle")
        return Answer.of_exact(self.numerator[0] / self.denominator[0] * self.size)

    def greatest(self) -> Extreme:
        """Return sup y over t > 0, the jump and values that are only approached included."""
        return self._highest

    def least(self) -> Extreme:
        """Return inf y over t > 0, the jump and values that are only approached included."""
        return self._lowest

    @cached_property
    def _highest(self) -> Extreme:
        return self._extreme(1)

    @cached_property
    def _lowest(self) -> Extreme:
        return self._extreme(-1)

    def _extreme(self, sign: int) -> Extreme:
        if not self._moves:
            return Extreme(Answer.of_exact(self._jump), Answer.of_exact(0))
        if not self.settles:
            return unsettled_extreme(self._course, sign)
        return highest(self._course, sign)

    @cached_property
    def _peak(self) -> Extreme:
        return greater(self._highest, mirrored(self._lowest))

    def peak_deviation(self) -> Extreme:
        """Return sup |y| over t > 0, the jump and values that are only approached included."""
        return self._peak

    def ceiling(self) -> arb | None:
        """Return a number that |y| never exceeds, found without a search; None where the response does not settle."""
        if not self._moves:
            return Answer.of_exact(abs(self._jump)).enclose(POLE_BITS).upper()
        return self._course.deviation.ceiling() if self.settles else None

    def settling(self, distance: fmpq) -> Answer:
        """Return the least T with |y(t) - final| <= distance for all t >= T (s). Raises ValueError unless > 0."""
        if distance <= 0:
            raise ValueError("a settling band needs a positive half-width")
        if not self.settles:
            return self.final_value()
        if not self._moves:
            return Answer.of_exact(0)
        if distance not in self._settling:
            self._settling[distance] = settling(self._course, distance)
        return self._settling[distance]

    def first_arrival(self, level: fmpq) -> Answer:
        """Return the first t > 0 with y(t) >= level, or <= level where the level is negative (s)."""
        if not self.settles:
            return self.final_value()
        if not self._moves:
            there = self._jump <= level if level < 0 else self._jump >= level
            return Answer.of_exact(0) if there else Answer.nothing("the response never reaches the level")
        if level not in self._arrivals:
            self._arrivals[level] = first_arrival(self._course, level)
        return self._arrivals[level]

    def enclose(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball that contains y(time) for time > 0 (y(0+) at 0), of relative radius 2^-bits where it can be."""
        if not self._moves or (isinstance(time, fmpq) and time == 0):
            return Answer.of_exact(self._jump).enclose(bits)
        return self._course.deviation.value_at(time, bits)

    def value_at(self, time: fmpq) -> Answer:
        """Return y(time) for time > 0, y(0+) at 0."""
        if not self._moves or time == 0:
            return Answer.of_exact(self._jump)
        return Answer.of_ball(lambda bits: self.enclose(time, bits)).accounted(
            lambda: modal_account(self._course, "the sum of all modes at that instant")
        )

    @cached_property
    def _in_pieces(self) -> PiecewiseResponse:
        """The same response as a single piece, for what the search for one piece is not asked."""
        return PiecewiseResponse(Superposed([StepWave(self.numerator, self.denominator, self.size, fmpq(0))]))

    def deviation_after(self, time: fmpq) -> Extreme:
        """Return sup over t >= time of |y(t) - final|, and where it is."""
        return self._in_pieces.deviation_after(time)

    def peak_rate(self) -> Extreme:
        """Return sup |dy/dt| over t > 0, infinite where y jumps, and when it is first taken."""
        return self._rate

    @cached_property
    def _rate(self) -> Extreme:
        if self._jump != 0:
            return Extreme(Answer.nothing(JUMPS, infinite=True), Answer.of_exact(0))
        return StepResponse(self.numerator * fmpq_poly([0, 1]), self.denominator, self.size).peak_deviation()

    def within(self, mask: Mask) -> Answer:
        """Return whether y stays inside; `at` has `time`, `value` and `limit` of the first violation (an infimum)."""
        return self._in_pieces.within(mask)

    def absolute_integral(self) -> Answer:
        """Return the integral of |y| over t > 0, or the reason why there is none."""
        return self._in_pieces.absolute_integral()

    def squared_integral(self) -> Answer:
        """Return the integral of y^2 over t > 0, exactly, or the reason why there is none."""
        final = self.final_value()
        if final.exact is None:
            return final
        if final.exact != 0:
            return Answer.nothing(LASTING)
        return Answer.of_exact(self.size * self.size * energy(self.numerator.right_shift(1), self.denominator))

    def curve(self, points: int = 400) -> tuple[tuple[fmpq, arb], ...]:
        """Return at most `points` pairs (time in s, ball of y) for drawing, in order of time, from t = 0 (y(0+)) on.

        The window ends when the response has settled, or after a few periods or growth times if it does not. Extremes
        and every crossing that was asked for so far are among the points; values carry far more than six digits.
        """
        if not self._moves:
            return tuple((fmpq(time), Answer.of_exact(self._jump).enclose(POLE_BITS)) for time in (0, 1))
        deviation = self._course.deviation
        if self.settles:
            window = settled_window(deviation, self._drawn_settling())
        else:
            window = unsettled_window(deviation.at(POLE_BITS).modes, deviation.time_exponent)
        return curve_points(deviation, window, self._known_times(), self._jump, points)

    def _drawn_settling(self) -> fmpq | None:
        """Return the time after which 2 % of the change, or of the peak where there is none, is left; None: unknown."""
        final = self.numerator[0] / self.denominator[0] * self.size
        band = abs(final) / 50
        if band == 0:
            peak = self.peak_deviation().value
            band = fmpq(0) if peak.absent else peak.enclose(64).mid().fmpq() / 50
        settled = self.settling(band) if band > 0 else None
        return None if settled is None or settled.absent else settled.enclose(64).mid().fmpq()

    def _known_times(self) -> list[fmpq]:
        """Return the times of the extremes and of all crossings that were asked for."""
        extremes = [self._highest.time, self._lowest.time]
        answers = [*extremes, *self._settling.values(), *self._arrivals.values()]
        balls = [answer.enclose(64) for answer in answers if answer.absent is None]
        return [ball.mid().fmpq() for ball in balls]
