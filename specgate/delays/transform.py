"""The Laplace transform of a delayed response: a quotient of quasi-polynomials, with what is known of its poles."""

from __future__ import annotations

from functools import cached_property

from flint import fmpq, fmpq_poly

from specgate.systems.polynomials import distinct_roots_times, order_at_origin
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_stability import is_stable
from specgate.terms.records import record

_S = fmpq_poly([0, 1])


@record
class Transform:
    """Y = numerator / (loop * below), with a period times the factor G (see `swing`).

    loop: the denominator of the channels. factors: of it, without common roots but s = 0 and each with simple roots
    but there, with their multiplicities. below: what the inputs add to the denominator. period: of one minus a
    cosine; the numerator has its end as well.
    """

    numerator: Quasi
    loop: Quasi
    factors: tuple[tuple[Quasi, int], ...]
    below: fmpq_poly
    period: fmpq | None = None

    @cached_property
    def denominator(self) -> Quasi:
        """The denominator; poles at 0 may cancel zeros of the numerator there."""
        return self.loop * Quasi.rational(self.below)

    @property
    def proper(self) -> bool:
        """Whether the response is a function of time, without an impulse."""
        return self.numerator.degree < self.denominator.undelayed.degree()

    @cached_property
    def stable(self) -> bool | None:
        """Whether every pole decays but those at s = 0, which leave a polynomial in time; None: not decided."""
        if self.below.right_shift(order_at_origin(self.below)).degree() > 0:
            return False
        integrators = order_at_origin(self.loop.content)
        if self.loop.first_at_origin()[0] > integrators:
            return None
        return is_stable(self.loop.over(_S**integrators))

    @cached_property
    def at_origin(self) -> tuple[fmpq, ...]:
        """The principal part of Y at s = 0: coefficients of s^-1, s^-2, … (exact, for e^0 is 1).

        With a period that holds for no more than two.
        """
        order = self.zero_times
        above = self.numerator.at_origin(order)
        below = self.denominator.at_origin(2 * order)[order:]
        quotient: list[fmpq] = []
        for power in range(order):
            known = sum((quotient[k] * below[power - k] for k in range(power)), fmpq(0))
            quotient.append((above[power] - known) / below[0])
        parts = tuple(reversed(quotient))
        last = max((power for power, part in enumerate(parts, 1) if part != 0), default=0)
        return parts[:last]

    @cached_property
    def zero_times(self) -> int:
        """How often s = 0 is a root of the denominator."""
        return self.denominator.first_at_origin()[0]

    @cached_property
    def rational_factors(self) -> tuple[tuple[fmpq_poly, int], ...]:
        """The square-free polynomials in s alone in the denominator, without s itself, with their multiplicities."""
        content = self.loop.content * self.below
        return distinct_roots_times(content.right_shift(order_at_origin(content)))

    @cached_property
    def quasi_factors(self) -> tuple[tuple[Quasi, int], ...]:
        """The square-free rest of the denominator, without polynomials in s alone, with their multiplicities."""
        found = [(factor.over(factor.content), times) for factor, times in self.factors]
        return tuple((factor, times) for factor, times in found if not factor.is_rational)
