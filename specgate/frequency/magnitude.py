"""The magnitude sqrt(above/below) of something over frequency, both polynomials in x that are not negative for x >= 0.

Its extremes over a range lie at the ends of the range or where above' below - above below' = 0.
"""

from __future__ import annotations

from functools import cached_property

from flint import fmpq, fmpq_poly

from specgate.frequency.choose import Candidate, greatest
from specgate.frequency.questions import Range
from specgate.frequency.recording import SQUARE, STILL, of_roots, of_values
from specgate.frequency.scale import Scale, X, ends, within
from specgate.frequency.spots import Infinity, Rational, Spot, positive_roots
from specgate.frequency.values import root_of
from specgate.response.answers import Answer

UNBOUNDED = "the gain grows without bound"


class Magnitude:
    """sqrt(above/below); the polynomials have no common zero x >= 0."""

    def __init__(self, above: fmpq_poly, below: fmpq_poly, scale: Scale) -> None:
        self.above, self.below, self.scale = above, below, scale

    @cached_property
    def stationary(self) -> tuple[Spot, ...]:
        """Where the magnitude is finite and stands still (x > 0); none where it is constant."""
        found = roots(wronskian(self.above, self.below))
        return tuple(spot for spot in found if spot.sign(self.below) != 0) if self.poles else found

    @cached_property
    def poles(self) -> tuple[Spot, ...]:
        """Where it is infinite, infinity itself left out."""
        return (*origin(self.below), *positive_roots(self.below))

    def supremum(self, over: Range | None = None) -> Answer:
        """Return the least upper bound over a range, with the frequency where it is reached or approached."""
        low, high = ends(self.scale, over)
        grows = isinstance(high, Infinity) and self.above.degree() > self.below.degree()
        if grows or within(self.scale, self.poles, over):
            return Answer.nothing(UNBOUNDED, infinite=True)
        spots = (low, *within(self.scale, self.stationary, over), high)
        found = greatest(
            Candidate(spot.ratio(self.above, self.below), {"frequency": self.scale.frequency(spot)}) for spot in spots
        )
        assert found is not None
        still = wronskian(self.above, self.below)
        answer = Candidate(root_of(found.value), found.at).answer
        return answer.accounted(lambda: of_roots(STILL, self.scale, still, candidates=len(spots)))

    def at(self, frequency: fmpq) -> Answer:
        """Return the magnitude at a frequency (rad/s)."""
        spot = self.scale.spot(frequency)
        if spot.sign(self.below) == 0:
            return Answer.nothing("a pole lies on the imaginary axis at this frequency", infinite=True)
        return root_of(spot.ratio(self.above, self.below)).accounted(lambda: of_values(SQUARE, self.scale))


def origin(p: fmpq_poly) -> tuple[Spot, ...]:
    """Return x = 0 where a polynomial vanishes there."""
    return (Rational(fmpq(0)),) if p[0] == 0 else ()


def roots(p: fmpq_poly) -> tuple[Spot, ...]:
    """Return the positive roots of a polynomial, none of one that vanishes identically."""
    return positive_roots(p) if p else ()


def wronskian(p: fmpq_poly, q: fmpq_poly) -> fmpq_poly:
    """Return p' q - p q', which vanishes where p/q stands still."""
    return p.derivative() * q - p * q.derivative()


__all__ = ["Magnitude", "X", "origin", "roots", "wronskian"]
