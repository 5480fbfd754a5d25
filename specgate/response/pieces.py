"""What a response is that is smooth piece by piece: pulses, dead time and samples leave kinks and jumps in it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Protocol

from flint import arb, fmpq, fmpq_poly

from specgate.response.accounts import Footing
from specgate.response.answers import Absent


class Pieces(Protocol):
    """y(t), t >= 0, analytic on each closed piece [kink(i), kink(i + 1)]; coherent SI, deviations from rest.

    All that is searched in such a response (extremes, settling, arrivals, masks, integrals) is searched by way of this
    alone, so that a new kind of loop or input only has to say what its pieces are. The methods with a body say more
    than the searches need at least: what is not told there leaves fewer answers exact, or a question open, but none
    wrong. A class that names this one as its base inherits them.
    """

    @property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""

    def kink(self, index: int) -> fmpq | None:
        """Return where piece `index` begins, 0 for the first; None: piece `index - 1` never ends."""

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of y, y', y'', y''' over a ball of times inside the closed piece, one-sided at its ends.

        A ball of times of any width that lies inside the piece is allowed, and a part of the ball gives balls that are
        no wider; for a narrow one `bits` more bits of precision make them as narrow as the ball of times allows. By
        the rounding of its radius a ball may reach over an end of the piece: there the analytic continuation counts.
        """

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time (not far from the least) from which on |y - final| <= distance is proved; None: none found."""

    def speed(self, index: int) -> float:
        """Return how fast the piece varies (rad/s), a hint of how finely to look: never part of a proof."""

    def jump(self, index: int) -> fmpq | None:
        """Return by how much y jumps at kink `index` (y(0+) for the first), exactly; None: not told exactly."""
        return None

    def guard(self) -> int:
        """Return how many bits cancel in y, about: a hint of how precisely to look, never part of a proof."""
        return 0

    def polynomial(self, index: int) -> fmpq_poly | None:
        """Return a piece as a rational polynomial in the time from its kink on; None: it is none, or that is not told.

        What is asked of such a piece at an instant is then exact.
        """
        return None

    def flat(self, index: int) -> bool:
        """Whether a piece is known to be constant, whatever its value."""
        return False

    def calm(self, index: int, order: int, sign: int, level: fmpq, *, backward: bool = False) -> int:
        """Return how many pieces in a row, from `index` on or back, have sign * y^(order) < level; 0: not told.

        It spares the search of each of many short pieces.
        """
        return 0

    def likely(self, first: int, last: int, order: int, sign: int) -> int | None:
        """Return one of several pieces on which sign * y^(order) is about greatest at its begin; None: not told.

        To look there first is no more than a saving.
        """
        return None

    def holding(self, time: fmpq) -> int | None:
        """Return the piece that holds a time, at a kink the one that begins there; None: it is to be searched for."""
        return None

    def continuous_from(self) -> fmpq | None:
        """Return a time from which on y does not jump; None: not told. Asked only where pieces follow without end."""
        return None

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return a length over which the piece moves strictly one way from its kink on, and which way; None: not told.

        Without it a slope that is exactly zero at a kink leaves a supremum there known to a small width only.
        """
        return None

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that y - final has for good and a time from which on it has; None: it has none, or not told.

        Where y is exactly its final value from some time on the sign is 0.
        """
        return None

    def runaway(self) -> int | None:
        """Return where y goes if it grows without bound: 1 up, -1 down, 0 both ways; None: it does not, or not told.

        Asked where y does not settle, like the three that follow.
        """
        return None

    def period(self) -> fmpq | None:
        """Return about the period of what drives y for ever: a hint of how much to draw; None: nothing does."""
        return None

    def reach(self, sign: int) -> Callable[[int], arb] | None:
        """Return the limit superior of sign * y, as balls by bits, of what swings for ever; None: not told."""
        return None

    def beyond(self, sign: int, level: fmpq) -> fmpq | None:
        """Return a time from which on sign * y <= level is proved; None: none found."""
        return None

    def slow_by(self, rate: fmpq) -> fmpq | None:
        """Return a time from which on |y'| <= rate is proved; None: none found."""
        return None

    def slope(self) -> Pieces | None:
        """Return the pieces of y', of a y that does not jump; None: not told. Asked only where y does not settle."""
        return None

    def footing(self) -> Footing | None:
        """Return what a proof stands on: what kind of response this is, and how its values are enclosed."""
        return None

    def area(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y over a part of a piece; None: there is no closed form."""
        return None

    def square(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y^2 over a part of a piece; None: there is no closed form."""
        return None

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of |y| and of y^2 from `time` on, for a final value of zero; None: none."""
        return None

    def closing_square(self, bits: int) -> tuple[fmpq, arb] | None:
        """Return a time and a ball of the integral of y^2 from there on, about 2^-bits of the whole; None: none."""
        return None

    def closing(self, bits: int) -> tuple[fmpq, arb] | None:
        """Return a time and a ball of the integral of |y| from there on, about 2^-bits of the whole; None: none.

        It spares the search of many half periods; y is not zero at that time.
        """
        return None
