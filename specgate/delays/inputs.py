"""Responses to inputs through channels with dead time: delayed steps through fractions only add terms.

One minus a cosine is a pulse whose transform has a factor more (see `swing`).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

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

_ONE = fmpq_poly([1])
_S = fmpq_poly([0, 1])

_NEVER = fmpq(0)
"""Stands for the period of what has none."""

_MOST_AT_ORIGIN = 2
"""Order of a pole at s = 0 up to which its principal part is that of a pulse."""

_BENT = "the response of a differentiator or of several integrators to one minus a cosine is not searched"

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
    transforms = [part.course.transform for part in parts]
    if not all(one.proper for one in transforms if one.period is None):
        return Absent("an impulse passes straight through to the signal, or a step through a differentiator")
    for one in transforms:
        if one.period is not None and not (one.proper and len(one.at_origin) <= _MOST_AT_ORIGIN):
            return Absent(_BENT, proved=False)
    response = PiecewiseResponse(DelayedPieces(parts))
    since = max(given.since for _, given in driven)
    return response if since == 0 else Counted(response, since)


def _parts(driven: Sequence[Driven]) -> list[Part]:
    """Return a part for each time at which a term begins; those that differ by a factor alone share their course."""
    by_time: dict[tuple[fmpq, fmpq], list[Share]] = {}
    for channel, given in driven:
        for term in terms(given):
            if isinstance(term, Bump):
                step = Term(_ONE, _ONE, term.size, term.begin)
                by_time.setdefault((term.begin, term.period), []).append((channel, step))
            else:
                by_time.setdefault((term.begin, _NEVER), []).append((channel, term))
    parts: list[Part] = []
    for (begin, period), shares in sorted(by_time.items()):
        transform = _transform(shares, None if period == _NEVER else period)
        if transform.numerator:
            parts.append(_part(begin, transform, parts))
    return parts


def _part(begin: fmpq, transform: Transform, known: Sequence[Part]) -> Part:
    lead = transform.numerator.terms[0][1].leading_coefficient()
    scaled = replace(transform, numerator=transform.numerator.scaled(1 / lead))
    for part in known:
        if part.course.transform == scaled:
            return Part(begin, lead, part.course)
    return Part(begin, lead, Course(scaled))


def _transform(shares: Sequence[Share], period: fmpq | None) -> Transform:
    """Return the transform of terms that begin together, counted from there; with a period they end after it."""
    below = least_common_multiple(_S * term.denominator for _, term in shares)
    total = Quasi(())
    for channel, term in shares:
        share = term.numerator * exact_quotient(below, _S * term.denominator) * term.size
        total = total + channel.numerator * Quasi.rational(share)
    if period is not None:
        total = total * Quasi.of({fmpq(0): _ONE, period: -_ONE})
    common = total.content.gcd(below) if total else below
    loop = shares[0][0]
    return Transform(total.over(common), loop.denominator, loop.factors, exact_quotient(below, common), period)
