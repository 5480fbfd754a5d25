"""Responses to inputs through channels with dead time: delayed steps through fractions only add terms."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq, fmpq_poly

from specgate.delays.course import Course
from specgate.delays.pieces import DelayedPieces, Part
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

Share = tuple[DelayedTransfer, Term]
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
    parts = _parts(driven)
    if isinstance(parts, Absent):
        return parts
    if not all(part.course.transform.proper for part in parts):
        return Absent("an impulse passes straight through to the signal, or a step through a differentiator")
    response = PiecewiseResponse(DelayedPieces(parts))
    since = max(given.since for _, given in driven)
    return response if since == 0 else Counted(response, since)


def _parts(driven: Sequence[Driven]) -> list[Part] | Absent:
    """Return a part for each time at which a term begins; those that differ by a factor alone share their course."""
    by_time: dict[fmpq, list[Share]] = {}
    for channel, given in driven:
        for term in terms(given):
            if isinstance(term, Bump):
                reason = "the response to one minus a cosine through a dead time is not answered by this version"
                return Absent(reason, proved=False)
            by_time.setdefault(term.begin, []).append((channel, term))
    parts: list[Part] = []
    for begin, shares in sorted(by_time.items()):
        transform = _transform(shares)
        if transform.numerator:
            parts.append(_part(begin, transform, parts))
    return parts


def _part(begin: fmpq, transform: Transform, known: Sequence[Part]) -> Part:
    lead = transform.numerator.terms[0][1].leading_coefficient()
    scaled = Transform(transform.numerator.scaled(1 / lead), transform.loop, transform.factors, transform.below)
    for part in known:
        if part.course.transform == scaled:
            return Part(begin, lead, part.course)
    return Part(begin, lead, Course(scaled))


def _transform(shares: Sequence[Share]) -> Transform:
    """Return the transform of terms that begin together, counted from there."""
    below = least_common_multiple(_S * term.denominator for _, term in shares)
    total = Quasi(())
    for channel, term in shares:
        share = term.numerator * exact_quotient(below, _S * term.denominator) * term.size
        total = total + channel.numerator * Quasi.rational(share)
    common = total.content.gcd(below) if total else below
    loop = shares[0][0]
    return Transform(total.over(common), loop.denominator, loop.factors, exact_quotient(below, common))
