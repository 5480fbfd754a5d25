"""Ranges and models that a requirement rests on, as they stand in a Review."""

from __future__ import annotations

from flint import fmpq

from specgate.compliance.assumptions import Assumption
from specgate.compliance.model.fact import ModelAssumption
from specgate.compliance.range_words import at_most
from specgate.compliance.readings import Reading
from specgate.response.answers import Answer
from specgate.review.printing import amount, location, place_of, result
from specgate.review.types import Amount, AssumptionReview, FigureReview, ModelAssumptionReview
from specgate.review.wanted import Wanted
from specgate.terms.enclosed import DIGITS
from specgate.terms.verdicts import Trilean

_METHOD = "the greatest distance from rest, or the greatest rate"


def assumption(assumed: Assumption, asked: Wanted) -> AssumptionReview:
    """Print one range; its peak, where a bound alone shows that it is kept, only if that is asked for."""
    ranged, decision, unit = assumed.ranged, assumed.decision, assumed.ranged.unit
    wanted = asked.drawn or decision.holds is not Trilean.YES
    return AssumptionReview(
        kind=ranged.kind,
        response=assumed.on,
        signal=ranged.signal,
        subsystem=ranged.instance,
        side=ranged.side,
        port=ranged.port.name,
        rest=amount(_exact(ranged.rest), unit),
        low=amount(_exact(ranged.low), unit, ranged.ends[0].as_written),
        high=amount(_exact(ranged.high), unit, ranged.ends[1].as_written),
        peak=result(assumed.peak, unit, None, method=_METHOD if asked.proof else None) if wanted else None,
        allowed=amount(assumed.allowed, unit),
        holds=None if decision.holds is Trilean.UNKNOWN else decision.holds is Trilean.YES,
        largest_size=_size(assumed) if wanted else None,
        largest_factor=None if not wanted or assumed.factor is None else at_most(assumed.factor.settled, DIGITS),
        reason=decision.reason,
    )


def model_assumption(assumed: ModelAssumption) -> ModelAssumptionReview:
    """Print what a model takes for granted, with the numbers that tell whether it holds."""
    holds = assumed.holds
    return ModelAssumptionReview(
        kind=assumed.kind,
        on=assumed.on,
        subsystem=assumed.subsystem,
        holds=None if holds is Trilean.UNKNOWN else holds is Trilean.YES,
        standing=assumed.standing.value,
        words=assumed.words,
        figures=tuple(FigureReview(one.name, place_of(one.reading, one.unit)) for one in assumed.figures),
        location=location(assumed.place),
    )


def _exact(value: fmpq) -> Reading:
    return Reading.once(Answer.of_exact(value))


def _size(assumed: Assumption) -> Amount | None:
    found = assumed.largest_size
    return None if found is None else Amount(at_most(found[0], DIGITS), found[1].symbol)
