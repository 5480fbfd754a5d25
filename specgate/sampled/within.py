"""Whether the magnitude of a transfer function in z stays inside a mask over frequency, up to half the sampling rate.

With x = tan(omega T/2)^2 and the edge e(omega) the room under it is e^2 b(x) - a(x), |G|^2 = a/b (over it, the
negative). Cells from left to right: the room is positive on a cell by its enclosure, or the cell is cut in two, until
it is so short that its ends decide; the first cell at whose right end the room is negative holds the first violation.
Near pi/T everything is written in 1/x. Where a level edge begins at zero frequency and the magnitude is exactly on it
there, the factor x is taken out of the room: touching complies.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise

from flint import arb, arb_poly, fmpq

from specgate.frequency.choose import Candidate, least
from specgate.frequency.slopes import Slope
from specgate.frequency.values import root_of
from specgate.response.answers import Answer
from specgate.response.questions import Mask, Points
from specgate.sampled.enclosed_axis import Axis
from specgate.sampled.scale import BEYOND, SampledScale
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

_BITS = 256
_CELLS = 6000
_FINEST = fmpq(1, 1 << 64)
_NEAR = "the gain is so near to the mask that it is not told on which side it is"


class _NotTold(Exception):
    pass


@record
class _Edge:
    """A limit from (start, low) to (end, high), rad/s; side: 1 for an upper one, -1 for a lower one."""

    side: int
    start: fmpq
    end: fmpq
    low: fmpq
    high: fmpq
    logarithmic: bool

    @property
    def level(self) -> bool:
        """Whether the limit is the same all along."""
        return self.low == self.high

    def square(self, omega: arb) -> arb:
        """Return the square of the limit; inside `working_precision`."""
        if self.level:
            return arb(self.low * self.low)
        if self.logarithmic:
            return Slope(self.start, self.end, self.low, self.high).square(omega, _BITS)
        limit = self.low + (omega - self.start) * (self.high - self.low) / (self.end - self.start)
        return limit * limit


def within(axis: Axis, scale: SampledScale, at_one: fmpq | None, mask: Mask) -> Answer:
    """Return whether a magnitude stays inside; `at` has the first violation. at_one: the value at zero frequency."""
    looked = _Looked(axis, scale, at_one)
    found, beyond = [], False
    try:
        for edge in (*_edges(1, mask.upper, mask), *_edges(-1, mask.lower, mask)):
            violation = looked.first_violation(edge)
            found += [] if violation is None else [violation]
            beyond = beyond or scale.beyond(edge.end)
    except _NotTold:
        return Answer.undecided(_NEAR)
    first = least(found)
    if first is not None:
        return replace(Answer.of_truth(False), at={"frequency": first.value, **first.at})
    if beyond:
        return Answer.undecided(f"the mask goes on where {BEYOND}")
    return Answer.of_truth(True)


def _edges(side: int, points: Points, mask: Mask) -> Iterator[_Edge]:
    for (start, low), (end, high) in pairwise(points):
        if start < end:
            yield _Edge(side, start, end, low, high, mask.logarithmic)
    if points and (mask.forever or len(points) == 1):
        start, limit = points[-1]
        yield _Edge(side, start, start, limit, limit, mask.logarithmic)


class _Looked:
    def __init__(self, axis: Axis, scale: SampledScale, at_one: fmpq | None) -> None:
        self._scale, self._at_one = scale, at_one
        balls = axis.at(_BITS)
        degree = max(balls.above.degree(), balls.below.degree())
        with working_precision(_BITS):
            self._above, self._below = (
                [*p.coeffs(), *([arb(0)] * (degree + 1 - len(p.coeffs())))] for p in (balls.above, balls.below)
            )
            last = (arb.pi() / scale.period).upper()
            self._last = last.fmpq() * (1 + _FINEST)
            """Just beyond pi/T, about which the magnitude is even."""

    def first_violation(self, edge: _Edge) -> Candidate | None:
        """Return where the magnitude first lies outside an edge, with value and limit there. Raises _NotTold."""
        if self._scale.beyond(edge.start):
            return None
        end = self._last if edge.end == edge.start or self._scale.beyond(edge.end) else edge.end
        waiting, shortest = [(edge.start, end)], (end - edge.start) * _FINEST
        touched = edge.start == 0 and edge.level and self._at_one is not None and self._at_one**2 == edge.low**2
        with working_precision(_BITS):
            if not touched and self._room(edge, arb(edge.start)) < 0:
                return self._described(edge, arb(edge.start))
            for _ in range(_CELLS):
                if not waiting:
                    return None
                low, high = waiting.pop()
                if self._room(edge, arb(low).union(arb(high)), without_x=touched) > 0:
                    continue
                if high - low > shortest:
                    middle = (low + high) / 2
                    waiting += [(middle, high), (low, middle)]
                elif self._room(edge, arb(high), without_x=touched) < 0:
                    return self._described(edge, arb(low).union(arb(high)))
                else:
                    raise _NotTold
        raise _NotTold

    def _room(self, edge: _Edge, omega: arb, *, without_x: bool = False) -> arb:
        """Return the room that an edge leaves, up to a positive factor."""
        half = omega * self._scale.period / 2
        above, below = self._above, self._below
        if half > 1:
            x = (arb.pi() / 2 - half).tan() ** 2
            above, below = above[::-1], below[::-1]
        else:
            x = half.tan() ** 2
        square = edge.square(omega)
        room = [edge.side * (square * b - a) for a, b in zip(above, below, strict=True)]
        if without_x:
            room = room[:-1] if half > 1 else room[1:]
        return arb_poly(room)(x)

    def _described(self, edge: _Edge, omega: arb) -> Candidate:
        """Return the frequency of a violation: at a corner the magnitude may be another than the limit."""
        limit = edge.square(omega)
        x = (omega * self._scale.period / 2).tan() ** 2
        value = arb_poly(self._above)(x) / arb_poly(self._below)(x)
        return Candidate(
            _known(omega) if not omega.is_exact() else Answer.of_exact(edge.start),
            {"value": root_of(_known(value)), "limit": root_of(_known(limit))},
        )


def _known(ball: arb) -> Answer:
    return Answer(Proof.ENCLOSED, refine=lambda _: ball)
