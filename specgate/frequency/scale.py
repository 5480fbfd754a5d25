"""What a spot on the axis is in rad/s: the square root of x for a loop in s.

Other loops can be brought to the same axis by a map of their own (a loop in z by w = (z - 1)/(z + 1), where
x = tan(omega T/2)^2 and the far end is omega = pi/T), so that all that is said of spots holds for them.
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Protocol

from flint import fmpq, fmpq_poly

from specgate.frequency.spots import Infinity, Rational, Spot
from specgate.frequency.values import root_of
from specgate.response.answers import Answer
from specgate.systems.polynomials import ONE

X = fmpq_poly([0, 1])


class Scale(Protocol):
    """Between spots and angular frequencies."""

    @property
    def variable(self) -> str:
        """What x is, in words."""

    def frequency(self, spot: Spot) -> Answer:
        """Return the frequency (rad/s) of a spot; absent and infinite where there is none."""

    def spot(self, frequency: fmpq) -> Spot:
        """Return the spot of a frequency (rad/s, not negative)."""

    def compare(self, spot: Spot, frequency: fmpq) -> int:
        """Return the sign of the frequency of a spot minus another (rad/s)."""


class Continuous:
    """The axis of a loop in s."""

    variable = "the square of the frequency"

    def frequency(self, spot: Spot) -> Answer:
        """Return sqrt(x)."""
        if isinstance(spot, Infinity):
            return Answer.nothing("approached at infinite frequency", infinite=True)
        return root_of(spot.ratio(X, ONE))

    def spot(self, frequency: fmpq) -> Spot:
        """Return x = frequency^2."""
        return Rational(frequency * frequency)

    def compare(self, spot: Spot, frequency: fmpq) -> int:
        """Return the sign of x - frequency^2."""
        if isinstance(spot, Infinity):
            return 1
        return spot.sign(fmpq_poly([-frequency * frequency, 1]))


def within(scale: Scale, spots: Iterable[Spot], over: tuple[fmpq, fmpq] | None) -> tuple[Spot, ...]:
    """Return the spots whose frequencies lie in a closed range; all of them without one."""
    if over is None:
        return tuple(spots)
    low, high = over
    return tuple(spot for spot in spots if scale.compare(spot, low) >= 0 >= scale.compare(spot, high))


def ends(scale: Scale, over: tuple[fmpq, fmpq] | None) -> tuple[Spot, Spot]:
    """Return the ends of a range, those of the axis without one."""
    if over is None:
        return Rational(fmpq(0)), Infinity()
    return scale.spot(over[0]), scale.spot(over[1])
