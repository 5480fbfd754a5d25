"""Whether a gain stays inside a mask over frequency, decided exactly wherever the edge is algebraic.

In omega everything is a polynomial with rational coefficients: with a(omega) = |N|^2 and b(omega) = |D|^2, an upper
edge e(omega) >= 0 holds where e^2 b - a >= 0, a lower one where a - e^2 b >= 0. A straight edge is a polynomial
itself; one that is straight in dB over log omega is a power of omega, e^2 = r^2 (omega/w)^q, a polynomial (or one over
one) where q is a whole number: a multiple of 10 dB per decade; other powers are decided in balls (`slopes`). Between
neighbouring roots the sign is that at any point between.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise
from typing import Literal

from flint import fmpq, fmpq_poly

from specgate.frequency.choose import Candidate, least
from specgate.frequency.scale import X
from specgate.frequency.slopes import NotTold, Room, Slope, first_violation
from specgate.frequency.spots import Rational, Root, Sign, Spot, positive_roots, sign_of
from specgate.frequency.values import root_of
from specgate.response.answers import Answer
from specgate.response.questions import Mask, Points
from specgate.systems.polynomials import ONE
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

Side = Literal["upper", "lower"]

_STEEPEST = 40
"""Greatest power of frequency that an edge may follow (400 dB per decade)."""

_NEAR = "the gain is so near to the mask that it is not told on which side it is"


@record
class Edge:
    """A piece of a mask: limit^2 = above(omega)/below(omega) from `start` to `end` (None: for ever), rad/s."""

    side: Side
    start: fmpq
    end: fmpq | None
    above: fmpq_poly
    below: fmpq_poly


def inside(above: fmpq_poly, below: fmpq_poly, mask: Mask) -> Answer:
    """Return whether sqrt(above/below), polynomials in x = omega^2, stays inside; `at` has the first violation.

    Raises ValueError for a negative limit, which no gain has.
    """
    if any(limit < 0 for _, limit in (*mask.upper, *mask.lower)):
        raise ValueError("a limit of a gain is not negative")
    sides: tuple[tuple[Side, Points], ...] = (("upper", mask.upper), ("lower", mask.lower))
    found = []
    try:
        for side, points in sides:
            for edge in _edges(side, points, logarithmic=mask.logarithmic, forever=mask.forever):
                violation = _first_violation(edge, above, below)
                if violation is not None:
                    found.append(violation)
    except NotTold:
        return Answer.undecided(_NEAR)
    first = least(found)
    if first is None:
        return Answer.of_truth(True)
    return replace(Answer.of_truth(False), at={"frequency": first.value, **first.at})


def _edges(side: Side, points: Points, *, logarithmic: bool, forever: bool) -> Iterator[Edge | tuple[Side, Slope]]:
    """Give the pieces of one side."""
    for (start, first), (end, second) in pairwise(points):
        if start < end:
            yield _edge(side, (start, first), (end, second), logarithmic=logarithmic)
    if points and (forever or len(points) == 1):
        start, level = points[-1]
        yield Edge(side, start, None if forever else start, fmpq_poly([level * level]), ONE)


def _edge(
    side: Side, first: tuple[fmpq, fmpq], second: tuple[fmpq, fmpq], *, logarithmic: bool
) -> Edge | tuple[Side, Slope]:
    (start, low), (end, high) = first, second
    if low == high or not logarithmic:
        slope = (high - low) / (end - start)
        line = fmpq_poly([low - slope * start, slope])
        return Edge(side, start, end, line * line, ONE)
    if start == 0:
        raise NotTold  # no line over the logarithm of frequency begins at zero
    power = _power((high / low) ** 2, end / start)
    if power is None:
        return side, Slope(start, end, low, high)
    return Edge(side, start, end, X ** max(0, power) * (low * low / start**power), X ** max(0, -power))


def _first_violation(edge: Edge | tuple[Side, Slope], above: fmpq_poly, below: fmpq_poly) -> Candidate | None:
    """Return where the gain first lies outside (an infimum), or None where it nowhere does. Raises NotTold."""
    if isinstance(edge, Edge):
        over_frequency = (above(X * X), below(X * X))
        spot = _algebraic_violation(edge, *over_frequency)
        return None if spot is None else Candidate(spot.ratio(X, ONE), _described(edge, spot, *over_frequency))
    side, slope = edge
    frequency = first_violation(Room(slope, above, below, 1 if side == "upper" else -1))
    if frequency is None:
        return None
    if frequency.exact is not None:
        x = frequency.exact * frequency.exact
        value = {} if below(x) == 0 else {"value": root_of(Answer.of_exact(above(x) / below(x)))}
        return Candidate(frequency, {**value, "limit": Answer.of_exact(slope.low)})
    # where the gain crosses the edge, both are one
    crossed = root_of(Answer(Proof.ENCLOSED, refine=lambda bits: slope.square(frequency.enclose(bits + 16), bits + 16)))
    return Candidate(frequency, {"value": crossed, "limit": crossed})


def _described(edge: Edge, spot: Spot, above: fmpq_poly, below: fmpq_poly) -> dict[str, Answer | str]:
    limit = {"limit": root_of(spot.ratio(edge.above, edge.below))}
    return {**limit} if spot.sign(below) == 0 else {"value": root_of(spot.ratio(above, below)), **limit}


def _power(rise: fmpq, step: fmpq) -> int | None:
    """Return the whole q with step^q = rise, where there is one; step > 1."""
    factor, sign = (rise, 1) if rise > 1 else (1 / rise, -1)
    reached = fmpq(1)
    for power in range(_STEEPEST + 1):
        if reached >= factor:
            return sign * power if reached == factor else None
        reached *= step
    return None


def _algebraic_violation(edge: Edge, above: fmpq_poly, below: fmpq_poly) -> Spot | None:
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
