"""How the gain of a loop ends that passes high frequencies: towards a limit below one, from above or from below.

With |L|^2 = A/B, polynomials in x = w^2, it moves one way beyond the last root of A'B - AB'. A dead time turns L past
the negative real axis again and again, by factors that tend to one over the limit. From that factor on the closed loop
has a chain of roots that does not decay (see `quasi_stability`), so that it is a margin as well, at infinite frequency.
Where the gain falls to its limit, a crossing leaves less than all that follow it.
"""

from __future__ import annotations

from flint import fmpq, fmpq_poly

from specgate.frequency.margins import PhaseCrossing
from specgate.response.answers import Answer
from specgate.systems.quasi_count import beyond_last_root, squared
from specgate.terms.records import record


@record
class End:
    """From `since` (rad/s) on |L| moves towards `limit`: direction 1 where it rises, -1 where it falls, 0 at rest."""

    limit: fmpq
    since: fmpq
    direction: int

    @property
    def crossing(self) -> PhaseCrossing:
        """The crossing at infinite frequency."""
        place = Answer.nothing("approached at infinite frequency", infinite=True)
        return PhaseCrossing(place, Answer.of_exact(1 / self.limit), 1)


def end_of(above: fmpq_poly, below: fmpq_poly) -> End | None:
    """Return how the gain of above/below ends; None where its limit is zero, or not below one."""
    if above.degree() != below.degree():
        return None
    limit = abs(above.leading_coefficient() / below.leading_coefficient())
    if not limit < 1:
        return None
    over, under = squared(above), squared(below)
    slope = over.derivative() * under - over * under.derivative()
    if not slope:
        return End(limit, fmpq(0), 0)
    return End(limit, beyond_last_root(slope), 1 if slope.leading_coefficient() > 0 else -1)
