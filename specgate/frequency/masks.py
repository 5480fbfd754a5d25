"""Whether a gain stays inside a mask over frequency, decided exactly wherever the edge is algebraic.

In omega everything is a polynomial with rational coefficients: with a(omega) = |N|^2 and b(omega) = |D|^2, an upper
edge e(omega) >= 0 holds where e^2 b - a >= 0, a lower one where a - e^2 b >= 0. A straight edge is a polynomial
itself; one that is straight in dB over log omega is a power of omega, e^2 = r^2 (omega/w)^q, a polynomial (or one over
one) where q is a whole number: a multiple of 10 dB per decade. Between neighbouring roots the sign is that at any point
between.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise
from typing import Literal

from flint import fmpq, fmpq_poly

from specgate.frequency.choose import Candidate, least
from specgate.frequency.scale import X
from specgate.frequency.spots import Rational, Root, Sign, Spot, positive_roots, sign_of
from specgate.frequency.values import root_of
from specgate.response.answers import Answer
from specgate.response.questions import Mask, Points
from specgate.systems.polynomials import ONE
from specgate.terms.precision import working_precision
from specgate.terms.records import record

Side = Literal["upper", "lower"]

_STEEPEST = 40
"""Greatest power of frequency that an edge may follow (400 dB per decade)."""

_SLOPE = "an edge of the mask that is no multiple of 10 dB per decade is not decided by this version"


@record
class Edge:
    """A piece of a mask: limit^2 = above(omega)/below(omega) from `start` to `end` (None: for ever), rad/s."""

    side: Side
    start: fmpq
    end: fmpq | None
    above: fmpq_poly
    below: fmpq_poly


def inside(above: fmpq_poly, below: fmpq_poly, mask: Mask) -> Answer:
    """Return whether sqrt(above/below), polynomials in x = omega^2, stays inside; `at` has the first violation."""
    over_frequency = (above(X * X), below(X * X))
    found = []
    for side, points in (("upper", mask.upper), ("lower", mask.lower)):
        for edge in _edges("upper" if side == "upper" else "lower", points, mask):
            if edge is None:
                return Answer.undecided(_SLOPE)
            spot = _first_violation(edge, *over_frequency)
            if spot is not None:
                found.append(Candidate(spot.ratio(X, ONE), _described(edge, spot, *over_frequency)))
    first = least(found)
    if first is None:
        return Answer.of_truth(True)
    return replace(Answer.of_truth(False), at={"frequency": first.value, **first.at})


def _described(edge: Edge, spot: Spot, above: fmpq_poly, below: fmpq_poly) -> dict[str, Answer | str]:
    limit = {"limit": root_of(spot.ratio(edge.above, edge.below))}
    return {**limit} if spot.sign(below) == 0 else {"value": root_of(spot.ratio(above, below)), **limit}


def _edges(side: Side, points: Points, mask: Mask) -> Iterator[Edge | None]:
    """Give the pieces of one side; None for one that is not algebraic."""
    for (start, first), (end, second) in pairwise(points):
        if start < end:
            yield _edge(side, (start, first), (end, second), logarithmic=mask.logarithmic)
    if points and (mask.forever or len(points) == 1):
        start, level = points[-1]
        yield Edge(side, start, None if mask.forever else start, fmpq_poly([level * level]), ONE)


def _edge(side: Side, first: tuple[fmpq, fmpq], second: tuple[fmpq, fmpq], *, logarithmic: bool) -> Edge | None:
    (start, low), (end, high) = first, second
    if low == high or not logarithmic:
        slope = (high - low) / (end - start)
        line = fmpq_poly([low - slope * start, slope])
        return Edge(side, start, end, line * line, ONE)
    if start == 0 or low == 0 or high == 0:
        return None
    power = _power((high / low) ** 2, end / start)
    if power is None:
        return None
    scale = low * low / start**power
    return Edge(side, start, end, X ** max(0, power) * scale, X ** max(0, -power))


def _power(rise: fmpq, step: fmpq) -> int | None:
    """Return the whole q with step^q = rise, where there is one; step > 1."""
    factor, sign = (rise, 1) if rise > 1 else (1 / rise, -1)
    reached = fmpq(1)
    for power in range(_STEEPEST + 1):
        if reached >= factor:
            return sign * power if reached == factor else None
        reached *= step
    return None


def _first_violation(edge: Edge, above: fmpq_poly, below: fmpq_poly) -> Spot | None:
    """Return where the gain first lies outside (an infimum), or None where it nowhere does."""
    room = edge.above * below - above * edge.below
    room = room if edge.side == "upper" else -room
    if edge.end == edge.start:
        return Rational(edge.start) if room(edge.start) < 0 else None
    inner = [root for root in (positive_roots(room) if room else ()) if _between(root, edge)]
    spots: list[Spot] = [Rational(edge.start), *inner]
    ends: list[Spot | None] = [*inner, None if edge.end is None else Rational(edge.end)]
    for left, right in zip(spots, ends, strict=True):
        if sign_of(room(_point_between(left, right))) < 0:
            return left
    return None


def _between(spot: Spot, edge: Edge) -> bool:
    low: Sign = spot.sign(fmpq_poly([-edge.start, 1]))
    return low > 0 and (edge.end is None or spot.sign(fmpq_poly([-edge.end, 1])) < 0)


def _point_between(left: Spot, right: Spot | None) -> fmpq:
    """Return a rational strictly between two spots; beyond the first where there is no second."""
    bits = 64
    while True:
        low = _end(left, bits, upper=True)
        if right is None:
            return low + 1
        high = _end(right, bits, upper=False)
        if low < high:
            return (low + high) / 2
        bits *= 2


def _end(spot: Spot, bits: int, *, upper: bool) -> fmpq:
    if isinstance(spot, Rational):
        return spot.x
    assert isinstance(spot, Root)
    ball = spot.enclose(bits)
    with working_precision(bits + 64):
        return (ball.upper() if upper else ball.lower()).fmpq()
