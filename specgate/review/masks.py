"""The mask of a criterion as it stands in a Review, for drawing."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import pairwise

from flint import arb, fmpq

from specgate.compliance.assessment import Assessment, CriterionAssessment
from specgate.response.questions import Points
from specgate.review.types import MaskReview
from specgate.terms.enclosed import in_unit, printed_short
from specgate.terms.unit import Unit
from specgate.terms.units import UnitTable

_BITS = 64
_PARTS = 24


def mask_of(assessed: CriterionAssessment) -> MaskReview | None:
    """Print the corners of a mask in the unit of the signal, in % of the change, or in dB; None without a mask."""
    given = assessed.arguments
    if given.mask is None:
        return None
    of_gain = given.laid_over == "frequency"
    unit = UnitTable.standard().parse("dB" if of_gain else "%") if of_gain or given.relative else assessed.signal
    bent = of_gain and not given.mask.logarithmic
    return MaskReview(
        over=given.laid_over,
        unit=unit.symbol,
        upper=_corners(given.mask.upper, unit, bent=bent),
        lower=_corners(given.mask.lower, unit, bent=bent),
        forever=given.mask.forever,
    )


def frequencies_asked(assessments: Iterable[Assessment]) -> dict[str, dict[str, list[fmpq]]]:
    """Return the frequencies (rad/s) that criteria name, corners of masks among them, by loop and break."""
    found: dict[str, dict[str, list[fmpq]]] = {}
    for criterion in (one for assessment in assessments for one in assessment.criteria):
        about, given = criterion.criterion.subject, criterion.arguments
        if about.kind != "break" or about.name is None:
            continue
        corners = () if given.mask is None else (*given.mask.upper, *given.mask.lower)
        named = [at for at, _ in corners] + ([] if given.frequency is None else [given.frequency])
        found.setdefault(about.loop, {}).setdefault(about.name, []).extend(named)
    return found


def _corners(points: Points, unit: Unit, *, bent: bool) -> tuple[tuple[float, float], ...]:
    """Print corners. bent: what is straight in the gain is not in dB, and gets corners between; zero has no dB."""
    return tuple(
        (printed_short(arb(at)), _printed(limit, unit))
        for at, limit in (_between(points) if bent else points)
        if unit.kind != "decibel" or limit > 0
    )


def _printed(limit: fmpq, unit: Unit) -> float:
    return printed_short(in_unit(lambda _: arb(limit), unit)(_BITS))


def _between(points: Points) -> Iterator[tuple[fmpq, fmpq]]:
    """Give corners and points of the straight lines between them."""
    for (start, low), (end, high) in pairwise(points):
        for k in range(_PARTS if end != start else 1):
            share = fmpq(k, _PARTS)
            yield start + share * (end - start), low + share * (high - low)
    yield from points[-1:]
