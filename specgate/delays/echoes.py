"""The square of a gain that swings for ever: a dead time passes as fast what is not delayed, or comes round the loop.

Let N have one term of the highest degree n, c s^n, delayed or not, and D two, s^n (1 + a e^(-T s)), |a| < 1. Far out

    |N/D| = |c + O(1/w)| / |1 + a e^(-j w T) + O(1/w)|

comes as near as one likes to |c|/(1 - |a|), again and again, and to |c|/(1 + |a|): these are its limits superior and
inferior. For all w of at least h it is at most, and at least,

    (|c| + u)/(1 - |a| - v),   (|c| - u)/(1 + |a| + v),

u and v what the other terms of N and D are at h together, in units of h^n: they fall as h rises. Let N have one term
alone, and D = d0 + E e^(-T s). Where |N| <= |c| |d0| and |E| <= |a| |d0|, which are signs of polynomials in w^2, the
triangle inequality gives the limit superior itself as a bound.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property

from flint import arb, fmpq

from specgate.delays.squared_gain import OSCILLATES, SquaredGain, size_from
from specgate.response.answers import Absent
from specgate.response.budget import OutOfWork
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import beyond_last_root, squared
from specgate.terms.precision import working_precision

_BITS = 64
_DOUBLINGS = 400
_TURNS = 600
"""Radians of the longest delay beyond which no peak is looked for."""


class EchoingGain(SquaredGain):
    """|N/D|^2 over frequency, N and D as above; D has no root on the axis. Raises OutOfWork where they are not such."""

    def __init__(self, numerator: Quasi, denominator: Quasi) -> None:
        degree = denominator.undelayed.degree()
        above, below = _leads(numerator, degree), _leads(denominator, degree)
        lead = denominator.undelayed[degree]
        if numerator.degree > degree or len(above) > 1 or len(below) != 2 or not abs(below[1]) < abs(lead):
            raise OutOfWork(OSCILLATES)
        self._above, self._below = numerator, denominator
        self._through = abs(above[0] / lead) if above else fmpq(0)
        self._echo = abs(below[1] / lead)
        self._degree, self._lead = degree, abs(lead)

    @cached_property
    def _below_limit(self) -> fmpq | None:
        """A frequency from which on the square does not exceed its limit superior; None: not told."""
        if len(self._above.terms) > 1 or len(self._below.terms) != 2:
            return None
        base, height = squared(self._below.undelayed), fmpq(0)
        for factor, (_, polynomial) in ((self._through, self._above.terms[0]), (self._echo, self._below.delayed[0])):
            spare = base * (factor * factor) - squared(polynomial)
            if spare:
                if spare.leading_coefficient() < 0:
                    return None
                height = max(height, beyond_last_root(spare))
        return height

    @property
    def final(self) -> fmpq | Absent:
        """It tends to nothing."""
        return Absent(OSCILLATES)

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return None: it does not settle."""
        return None

    def reach(self, sign: int) -> Callable[[int], arb]:
        """Return the limit superior of sign * square."""
        limit = sign * self._limit(sign) ** 2

        def ball(bits: int) -> arb:
            with working_precision(bits):
                return arb(limit)

        return ball

    def _limit(self, sign: int) -> fmpq:
        return self._through / (1 - sign * self._echo)

    def beyond(self, sign: int, level: fmpq) -> fmpq | None:
        """Return a frequency from which on sign * square <= level; None: none is found that is worth a search."""
        height, last = fmpq(1, 2**20), _TURNS / self._below.delayed[-1][0]
        told = self._below_limit if sign > 0 and level >= self._limit(1) ** 2 else None
        with working_precision(_BITS):
            for _ in range(_DOUBLINGS):
                if told is not None and height > told:
                    return told
                if height > last:
                    return None
                if self._below_from(height, sign, level):
                    return height
                height = height * fmpq(9, 8)
        return None

    def _below_from(self, height: fmpq, sign: int, level: fmpq) -> bool:
        above = size_from(self._above, height, self._degree) / self._lead - self._through
        below = size_from(self._below, height, self._degree) / self._lead - (1 + self._echo)
        most = (self._through + sign * above) / (1 - sign * (self._echo + below))
        if sign > 0:
            return bool(self._echo + below < 1) and bool(most * most <= arb(level))
        return bool(most > 0) and bool(-most * most <= arb(level))

    def bound(self) -> tuple[fmpq, arb]:
        """Return the last frequency that is searched, and what the square does not exceed from there on."""
        height = _TURNS / self._below.delayed[-1][0]
        with working_precision(_BITS):
            above = size_from(self._above, height, self._degree) / self._lead
            below = 2 - size_from(self._below, height, self._degree) / self._lead
            return height, (above / below) ** 2 if below > 0 else arb("inf")


def _leads(quasi: Quasi, degree: int) -> list[fmpq]:
    """Return the coefficients of a power in the terms that have it."""
    return [p[degree] for _, p in quasi.terms if p.degree() == degree]
