"""What may be asked of a response in time, whatever kind of loop it comes from."""

from __future__ import annotations

from typing import Protocol

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.extremes import Extreme
from specgate.terms.records import record

Points = tuple[tuple[fmpq, fmpq], ...]
"""Corners (time or rad/s, limit), in order; two with the same first member are a jump."""


@record
class Mask:
    """Limits that are straight lines between corners, coherent SI.

    Touching complies; at a jump the looser limit holds; past its last corner a limit ends, unless `forever`, and before
    its first one there is none. logarithmic: over frequency only: the lines are straight in dB over the logarithm of
    frequency, as limits in dB are drawn (a gain proportional to a power of frequency).
    """

    upper: Points = ()
    lower: Points = ()
    forever: bool = False
    logarithmic: bool = False


class TimeResponse(Protocol):
    """Response y(t), t > 0, as deviation from rest, t counted from the start of the input; all quantities coherent SI.

    A question without a value is answered with the reason. Every question is answered once and kept.
    """

    @property
    def settles(self) -> bool:
        """Whether y tends to a constant, with every mode on the way decaying; decided exactly."""

    def initial_value(self) -> Answer:
        """Return y(0+)."""

    def final_value(self) -> Answer:
        """Return the limit of y for large t: exact, or the reason why there is none."""

    def greatest(self) -> Extreme:
        """Return sup y over t > 0, jumps and values that are only approached included."""

    def least(self) -> Extreme:
        """Return inf y over t > 0, jumps and values that are only approached included."""

    def peak_deviation(self) -> Extreme:
        """Return sup |y| over t > 0, jumps and values that are only approached included."""

    def settling(self, distance: fmpq) -> Answer:
        """Return the least T with |y(t) - final| <= distance for all t >= T (s)."""

    def first_arrival(self, level: fmpq) -> Answer:
        """Return the first t > 0 with y(t) >= level, or <= level where the level is negative (s)."""

    def enclose(self, time: fmpq | arb, bits: int) -> arb:
        """Return a ball that contains y(time); at a jump the value just after it."""

    def value_at(self, time: fmpq) -> Answer:
        """Return y(time), at a jump the value just after it."""

    def deviation_after(self, time: fmpq) -> Extreme:
        """Return sup over t >= time of |y(t) - final|, and where it is."""

    def peak_rate(self) -> Extreme:
        """Return sup |dy/dt| over t > 0, infinite where y jumps, and when it is first taken."""

    def within(self, mask: Mask) -> Answer:
        """Return whether y stays inside; `at` has `time`, `value` and `limit` of the first violation (an infimum)."""

    def absolute_integral(self) -> Answer:
        """Return the integral of |y| over t > 0, or the reason why there is none."""

    def squared_integral(self) -> Answer:
        """Return the integral of y^2 over t > 0: exact where y is rational, or the reason why there is none."""

    def curve(self, points: int = 400) -> tuple[tuple[fmpq, arb], ...]:
        """Return at most `points` pairs (time, ball of y) for drawing, all extremes and asked crossings among them."""
