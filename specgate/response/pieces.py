"""What a response is that is smooth piece by piece: pulses, dead time and samples leave kinks and jumps in it."""

from __future__ import annotations

from typing import Protocol

from flint import arb, fmpq

from specgate.response.answers import Absent


class Pieces(Protocol):
    """y(t), t >= 0, analytic on each closed piece [kink(i), kink(i + 1)]; coherent SI, deviations from rest.

    All that is searched in such a response (extremes, settling, arrivals, masks, integrals) is searched by way of this
    alone, so that a new kind of loop or input only has to say what its pieces are.
    """

    @property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""

    def kink(self, index: int) -> fmpq | None:
        """Return where piece `index` begins, 0 for the first; None: piece `index - 1` never ends."""

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of y, y', y'', y''' over a ball of times inside the closed piece, one-sided at its ends.

        A ball of times of any width that lies inside the piece is allowed, and a part of the ball gives balls that are
        no wider; for a narrow one `bits` more bits of precision make them as narrow as the ball of times allows.
        """

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time (not far from the least) from which on |y - final| <= distance is proved; None: none found."""

    def speed(self, index: int) -> float:
        """Return how fast the piece varies (rad/s), a hint of how finely to look: never part of a proof."""
