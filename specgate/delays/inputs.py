"""Responses to inputs through channels with dead time: delayed steps through fractions only add terms."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq_poly

from specgate.delays.pieces import DelayedPieces
from specgate.delays.transform import Transform
from specgate.response.answers import Absent
from specgate.response.counted import Counted
from specgate.response.inputs import Bump, Input, Term, respond, terms
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import TimeResponse
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.polynomials import exact_quotient, least_common_multiple
from specgate.systems.quasi import Quasi

_S = fmpq_poly([0, 1])

Driven = tuple[DelayedTransfer, Input]
"""A channel to the signal that is looked at, and what drives it."""


def respond_late(driven: Sequence[Driven]) -> TimeResponse | Absent:
    """Return the response to inputs that act at once; all channels have the same denominator.

    Absent where the signal would hold an impulse, or where the response is not searched.
    """
    rational = [(channel.rational, given) for channel, given in driven]
    undelayed = [(channel, given) for channel, given in rational if channel is not None]
    if len(undelayed) == len(driven):
        return respond(undelayed)
    transform = _transform(driven)
    if isinstance(transform, Absent):
        return transform
    if not transform.proper:
        return Absent("an impulse passes straight through to the signal, or a step through a differentiator")
    response = PiecewiseResponse(DelayedPieces(transform))
    since = max(given.since for _, given in driven)
    return response if since == 0 else Counted(response, since)


def _transform(driven: Sequence[Driven]) -> Transform | Absent:
    sums: list[tuple[DelayedTransfer, Term]] = []
    for channel, given in driven:
        for term in terms(given):
            if isinstance(term, Bump):
                reason = "the response to one minus a cosine through a dead time is not answered by this version"
                return Absent(reason, proved=False)
            sums.append((channel, term))
    below = least_common_multiple(_S * term.denominator for _, term in sums)
    total = Quasi(())
    for channel, term in sums:
        share = term.numerator * exact_quotient(below, _S * term.denominator) * term.size
        total = total + channel.numerator * Quasi.of({term.begin: share})
    common = total.content.gcd(below) if total else below
    loop = driven[0][0]
    return Transform(total.over(common), loop.denominator, loop.factors, exact_quotient(below, common))
