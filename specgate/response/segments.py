"""What the searches read a response from: a stretch of time on which it can be sampled and bounded in floats."""

from __future__ import annotations

from math import inf, nextafter
from typing import Protocol

import numpy as np
from flint import arb, fmpq
from numpy.typing import NDArray

Floats = NDArray[np.float64]

UNIT_ROUNDOFF = 2.0**-53


class Segment(Protocol):
    """A stretch of the deviation g(start + t), in the normalised units of the response, for local times t >= 0."""

    @property
    def start(self) -> fmpq:
        """The instant that local times count from, a dyadic number."""

    def sample(self, times: Floats) -> tuple[Floats, Floats]:
        """Return g, g', g'' at n local times and proved bounds of their errors, both of shape (n, 3)."""

    def bounds(self, left: Floats, right: Floats) -> Floats:
        """Return upper bounds of |g''|, |g'''|, |g''''| and |g'''''| over n intervals, shape (n, 4)."""


def at_least(value: arb) -> float:
    """Return a float that is not above any number in the ball."""
    return nextafter(float(value.lower()), -inf)


def at_most(value: arb) -> float:
    """Return a float that is not below any number in the ball."""
    return nextafter(float(value.upper()), inf)


def exact(value: float) -> fmpq:
    """Return the rational that a float is."""
    return fmpq(*value.as_integer_ratio())


def float_of(value: fmpq) -> float:
    """Return the float nearest to a rational, an infinite one where it is out of range."""
    try:
        return int(value.p) / int(value.q)
    except OverflowError:
        return inf if value > 0 else -inf
