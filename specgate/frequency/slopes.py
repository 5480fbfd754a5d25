"""A gain against an edge of a mask that follows an irrational power of frequency: decided in balls, or left open.

With a(x) = |N|^2, b(x) = |D|^2 at x = omega^2 and the edge e^2 = low^2 (omega/start)^q, the room under it is
E(omega) = e^2 b - a (over it, -E). Cells from left to right: E is known to be positive on a cell by its enclosure, or
by the mean value form, or has a slope of one sign there, so that its ends decide; else the cell is cut in two. At the
corners, which are rational, the sign is exact. The first zero where E falls is the first violation (an infimum).
"""

from __future__ import annotations

from typing import Protocol

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.newton import Zero
from specgate.frequency.spots import Sign, sign_of
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

_CELLS = 4000
_PRECISIONS = (64, 128, 256, 512, 1024)
_BITS = 128


class NotTold(Exception):
    """A gain so near to an edge that it is not told on which side it is."""


@record
class Slope:
    """An edge from (start, low) to (end, high), straight in dB over log omega; rad/s, plain ratios, all positive."""

    start: fmpq
    end: fmpq
    low: fmpq
    high: fmpq

    def square(self, omega: arb, bits: int) -> arb:
        """Return a ball of the square of the limit over a ball of frequencies."""
        with working_precision(bits):
            return arb(self.low * self.low) * ((omega / self.start).log() * self._power()).exp()

    def rise(self, omega: arb, bits: int) -> arb:
        """Return a ball of the derivative of that square."""
        square = self.square(omega, bits)
        with working_precision(bits):
            return square * self._power() / omega

    def _power(self) -> arb:
        return 2 * arb(self.high / self.low).log() / arb(self.end / self.start).log()


class Room:
    """E on an edge: how much room the gain leaves; `side` is 1 under an upper edge, -1 over a lower one."""

    def __init__(self, edge: Slope, above: fmpq_poly, below: fmpq_poly, side: Sign) -> None:
        self.edge, self.side = edge, side
        self._parts = (above, below, above.derivative(), below.derivative())

    @property
    def span(self) -> tuple[fmpq, fmpq]:
        """Both ends of the edge (rad/s)."""
        return self.edge.start, self.edge.end

    def value(self, omega: arb, bits: int) -> arb:
        """Return a ball of E."""
        a, b, _, _ = self._at(omega, bits)
        square = self.edge.square(omega, bits)
        with working_precision(bits):
            return self.side * (square * b - a)

    def slope(self, omega: arb, bits: int) -> arb:
        """Return a ball of dE/d omega."""
        _, b, da, db = self._at(omega, bits)
        square, rise = self.edge.square(omega, bits), self.edge.rise(omega, bits)
        with working_precision(bits):
            return self.side * (square * db + rise * b - da)

    def _at(self, omega: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return a and b, and their derivatives over omega."""
        with working_precision(bits):
            x = omega * omega
            first, second, third, fourth = (p.numer()(x) / p.denom() for p in self._parts)
            return first, second, 2 * omega * third, 2 * omega * fourth

    def sign_at(self, omega: fmpq) -> Sign:
        """Return the sign of E: exact at the corners. Raises NotTold."""
        corners = {self.edge.start: self.edge.low, self.edge.end: self.edge.high}
        if omega in corners:
            a, b = (p(omega * omega) for p in self._parts[:2])
            return sign_of(self.side * (corners[omega] ** 2 * b - a))
        for bits in _PRECISIONS:
            with working_precision(bits):
                value = self.value(arb(omega), bits)
                if value != 0:
                    return 1 if value > 0 else -1
        raise NotTold


class Rooms(Protocol):
    """E between two frequencies, however the gain is given."""

    @property
    def span(self) -> tuple[fmpq, fmpq]:
        """Both ends (rad/s)."""

    def value(self, omega: arb, bits: int) -> arb:
        """Return a ball of E."""

    def slope(self, omega: arb, bits: int) -> arb:
        """Return a ball of dE/d omega."""

    def sign_at(self, omega: fmpq) -> Sign:
        """Return the sign of E. Raises NotTold."""


def first_violation(room: Rooms) -> Answer | None:
    """Return the first frequency beyond which there is no room; None where there is some everywhere. Raises NotTold."""
    waiting = [room.span]
    for _ in range(_CELLS):
        if not waiting:
            return None
        left, right = waiting.pop()
        cell = _ball(left, right)
        slope = room.slope(cell, _BITS)
        if _positive(room, cell, slope):
            continue
        with working_precision(_BITS):
            one_signed = slope != 0
        if not one_signed:
            middle = (left + right) / 2
            waiting += [(middle, right), (left, middle)]
        elif room.sign_at(left) < 0 or (room.sign_at(left) == 0 and slope < 0):
            return Answer.of_exact(left)
        elif slope < 0 and room.sign_at(right) < 0:
            return Answer(Proof.ENCLOSED, refine=Zero(room.value, room.slope, cell, rising=False).enclose)
    raise NotTold


def _ball(left: fmpq, right: fmpq) -> arb:
    with working_precision(_BITS):
        return arb(left).union(arb(right))


def _positive(room: Rooms, cell: arb, slope: arb) -> bool:
    """Whether E > 0 on a cell: by its enclosure, or by that at the middle and the slopes."""
    if room.value(cell, _BITS) > 0:
        return True
    middle = room.value(cell.mid(), _BITS)
    with working_precision(_BITS):
        return bool(middle + slope * (cell - cell.mid()) > 0)
