"""Whether a gain with a dead time inside stays within a mask over frequency: proved cell by cell.

With N and D in balls, E = e^2 |D|^2 - |N|^2 is the room under an edge e (over one, -E), searched from left to right as
under edges that are no polynomials (`specgate.frequency.slopes`). At frequency zero E is exact; where it is zero there,
under a level edge, its sign beyond is that of the first coefficient of its even series (`DelayedAxis.start_of`). Under
the last level of an edge for ever D exceeds N beyond some frequency; over one a violation is found sooner or later
where the gain falls to zero.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise

from flint import acb, arb, fmpq

from specgate.delays.axis import DelayedAxis, mirrored
from specgate.delays.magnitude import DelayedMagnitude
from specgate.delays.recording import AXIS, ROOM
from specgate.frequency.choose import Candidate, least
from specgate.frequency.slopes import NotTold, Slope, first_violation
from specgate.frequency.spots import Sign, sign_of
from specgate.frequency.values import root_of
from specgate.response.accounts import Account
from specgate.response.answers import Answer
from specgate.response.questions import Mask, Points
from specgate.systems.delayed_network import DelayedTransfer
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

_NEAR = "the gain is so near to the mask that it is not told on which side it is"
_DOUBLINGS = 40


@record
class Straight:
    """An edge from (start, low) to (end, high), straight over frequency; rad/s, plain ratios."""

    start: fmpq
    end: fmpq
    low: fmpq
    high: fmpq

    @property
    def _climb(self) -> fmpq:
        return (self.high - self.low) / (self.end - self.start) if self.end > self.start else fmpq(0)

    def limit(self, omega: arb) -> arb:
        """Return a ball of the limit, at the precision that is set."""
        return arb(self.low) + (omega - self.start) * self._climb

    def square(self, omega: arb, bits: int) -> arb:
        """Return a ball of the square of the limit."""
        with working_precision(bits):
            return self.limit(omega) ** 2

    def rise(self, omega: arb, bits: int) -> arb:
        """Return a ball of the derivative of that square."""
        with working_precision(bits):
            return 2 * self.limit(omega) * self._climb


class LateRoom:
    """E on an edge; side: 1 under an upper edge, -1 over a lower one."""

    def __init__(self, edge: Straight | Slope, axis: DelayedAxis, side: Sign) -> None:
        self.edge, self.axis, self.side = edge, axis, side
        self.span = edge.start, edge.end

    def value(self, omega: arb, bits: int) -> arb:
        """Return a ball of E."""
        square = self.edge.square(omega, bits)
        with working_precision(bits):
            n, d = self.axis.parts(omega, bits)
            return self.side * (square * _square(d) - _square(n))

    def slope(self, omega: arb, bits: int) -> arb:
        """Return a ball of dE/d omega: that of |f|^2 is -2 Im(f' conj f)."""
        square, rise = self.edge.square(omega, bits), self.edge.rise(omega, bits)
        with working_precision(bits):
            n, d, dn, dd = self.axis.with_slopes(omega)
            turned = square * (dd * d.conjugate()).imag - (dn * n.conjugate()).imag
            return self.side * (rise * _square(d) - 2 * turned)

    def sign_at(self, omega: fmpq) -> Sign:
        """Return the sign of E: exact at zero frequency. Raises NotTold."""
        if omega == 0:
            above, below = (part.at_origin(1)[0] for part in (self.axis.numerator, self.axis.denominator))
            return sign_of(self.side * ((self.edge.low * below) ** 2 - above * above))
        bits = 64
        while bits <= HIGHEST:
            with working_precision(bits):
                value = self.value(arb(omega), bits)
                if value != 0:
                    return 1 if value > 0 else -1
            bits *= 2
        raise NotTold

    def past_origin(self) -> LateRoom | None:
        """Return the edge without a part from frequency zero on where E, zero there, is positive; None: it is negative.

        Raises NotTold where the edge is not level, or where the sign is not told.
        """
        if self.edge.low != self.edge.high:
            raise NotTold
        above, below = self.axis.numerator, self.axis.denominator
        level = self.edge.low * self.edge.low
        room = (below * mirrored(below)).scaled(level) + (above * mirrored(above)).scaled(fmpq(-1))
        reach = self.axis.start_of(room, odd=False) if room else self.edge.end
        if reach == 0:
            raise NotTold
        start = min(reach, self.edge.end)
        if room and self.sign_at(start) < 0:
            return None
        return LateRoom(Straight(start, self.edge.end, self.edge.low, self.edge.high), self.axis, self.side)


def _square(value: acb) -> arb:
    return value.real * value.real + value.imag * value.imag


def late_inside(transfer: DelayedTransfer, mask: Mask) -> Answer:
    """Return whether |N/D| stays inside; `at` has the first violation. Raises ValueError for a negative limit."""
    if any(limit < 0 for _, limit in (*mask.upper, *mask.lower)):
        raise ValueError("a limit of a gain is not negative")
    axis = DelayedAxis(transfer)
    sides: tuple[tuple[Sign, Points], ...] = ((1, mask.upper), (-1, mask.lower))
    try:
        found = [_violation(room) for side, points in sides for room in _rooms(axis, side, points, mask)]
        found += [_for_ever(axis, side, points[-1]) for side, points in sides if points and mask.forever]
    except NotTold:
        return Answer.undecided(_NEAR)
    first = least(one for one in found if one is not None)
    if first is None:
        return Answer.of_truth(True).accounted(_account)
    return replace(Answer.of_truth(False), at={"frequency": first.value, **first.at}, how=_account)


def first_below(transfer: DelayedTransfer, level: fmpq) -> Answer:
    """Return the first frequency from which on |N/D| falls below a level that it is not below at zero (rad/s)."""
    try:
        found = _for_ever(DelayedAxis(transfer), -1, (fmpq(0), level))
    except NotTold:
        return Answer.undecided("whether the gain ever falls so far is not told")
    return Answer.nothing("the gain never falls so far") if found is None else found.value


def _account() -> Account:
    return Account(ROOM, AXIS)


def _rooms(axis: DelayedAxis, side: Sign, points: Points, mask: Mask) -> Iterator[LateRoom]:
    for (start, low), (end, high) in pairwise(points):
        if start == end:
            continue
        if low == high or not mask.logarithmic:
            yield LateRoom(Straight(start, end, low, high), axis, side)
        elif start == 0:
            raise NotTold  # no line over the logarithm of frequency begins at zero
        else:
            yield LateRoom(Slope(start, end, low, high), axis, side)
    if len(points) == 1 and not mask.forever:
        start, level = points[0]
        yield LateRoom(Straight(start, start, level, level), axis, side)


def _violation(room: LateRoom) -> Candidate | None:
    """Return the first violation on an edge; an edge of no length is one frequency. Raises NotTold."""
    start, end = room.span
    at_start = room.sign_at(start)
    rest = room.past_origin() if at_start == 0 and start == 0 and end > 0 else room
    if at_start < 0 or rest is None:
        return _at_corner(room)
    frequency = first_violation(rest) if start < end else None
    return None if frequency is None else _crossed(room, frequency)


def _for_ever(axis: DelayedAxis, side: Sign, last: tuple[fmpq, fmpq]) -> Candidate | None:
    """Return the first violation beyond the last corner. Raises NotTold."""
    start, level = last
    if side < 0 and level == 0:
        return None
    safe = axis.below_one_beyond(1 / level) if side > 0 and level > 0 else None
    if safe is not None:
        return _violation(LateRoom(Straight(start, safe, level, level), axis, side)) if safe > start else None
    end = 2 * start if start > 0 else fmpq(1)
    for _ in range(_DOUBLINGS):
        found = _violation(LateRoom(Straight(start, end, level, level), axis, side))
        if found is not None:
            return found
        start, end = end, 2 * end
    raise NotTold


def _at_corner(room: LateRoom) -> Candidate:
    start = room.edge.start
    value = DelayedMagnitude(room.axis.numerator, room.axis.denominator).at(start)
    beside: dict[str, Answer | str] = {} if value.absent is not None else {"value": value}
    return Candidate(Answer.of_exact(start), {**beside, "limit": Answer.of_exact(room.edge.low)})


def _crossed(room: LateRoom, frequency: Answer) -> Candidate:
    """Return a violation that begins where the gain crosses the edge: there both are one."""
    edge = room.edge
    square = Answer(Proof.ENCLOSED, refine=lambda bits: edge.square(frequency.enclose(bits + 16), bits + 16))
    crossed = root_of(square)
    return Candidate(frequency, {"value": crossed, "limit": crossed})
