"""Margins near a tangency: a very small change of the loop creates or removes the crossing that decides.

Crossings are roots x of an excess E: A - B for |L| = 1, I for L on the real axis. Where E stands still near zero, two
crossings are about to be created (E turns back before zero) or to vanish (E turns back after zero). This is a warning
that goes with a proved value, not a part of its proof; near means within 1 % of gain, or within 1/100 rad of phase.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import replace
from typing import Generic, TypeVar

from flint import fmpq, fmpq_poly

from specgate.frequency.choose import order, order_of
from specgate.frequency.margins import GainCrossing, PhaseCrossing
from specgate.frequency.spots import Spot, positive_roots
from specgate.frequency.values import scaled
from specgate.response.answers import Answer, Fragile
from specgate.terms.records import record

C = TypeVar("C", GainCrossing, PhaseCrossing)

BY_GAIN = "less than 1 % in the gain"
BY_PHASE = "less than 0.6 deg in the phase"

CREATED = "a change of {what} brings about a crossing at another frequency that would decide"
REMOVED = "a change of {what} removes the crossing that decides"

_LESS = fmpq(99, 100)
"""A crossing decides only where it leaves less than this part of what is left now."""


@record
class Tangency:
    """Where an excess turns back near zero; `created`: before it is reached, so that crossings would come about."""

    spot: Spot
    created: bool


def tangencies(excess: fmpq_poly, near: Callable[[Spot], bool]) -> Iterator[Tangency]:
    """Give the places x > 0 where an excess stands still and is near zero by `near`."""
    slope = excess.derivative()
    bend = slope.derivative()
    for spot in positive_roots(slope) if slope else ():
        if near(spot):
            yield Tangency(spot, spot.sign(excess) * spot.sign(bend) > 0)


class Watch(Generic[C]):
    """The crossings of one kind with the tangencies near them.

    what: the small change in words. near: each tangency as the crossing that it would be, with its `created`.
    """

    def __init__(self, what: str, crossings: Sequence[C], near: Iterable[tuple[C, bool]]) -> None:
        self._what = what
        self._crossings: Sequence[C] = crossings
        self._near: list[tuple[C, bool]] = list(near)

    def warned(self, answer: Answer, decide: Callable[[Sequence[C]], Answer]) -> Answer:
        """Return an answer that `decide` drew from all crossings, with a warning where it is fragile."""
        for as_crossing, created in self._near:
            found = (
                self._created(answer, decide([as_crossing]))
                if created
                else self._removed(answer, as_crossing.frequency, decide)
            )
            if found is not None:
                return replace(answer, fragile=found)
        return answer

    def _created(self, answer: Answer, other: Answer) -> Fragile | None:
        if other.absent is not None or (answer.absent is None and order(other, scaled(answer, _LESS)) != -1):
            return None
        return Fragile(CREATED.format(what=self._what), other.enclose)

    def _removed(self, answer: Answer, at: Answer, decide: Callable[[Sequence[C]], Answer]) -> Fragile | None:
        """Look at what is left without the two crossings next to a tangency, if one of them decides."""
        below: list[C] = [one for one in self._crossings if order_of(one.frequency, at) <= 0]
        above: list[C] = [one for one in self._crossings if order_of(one.frequency, at) >= 0]
        vanishing = below[-1:] + above[:1]
        place = None if answer.at is None else answer.at.get("frequency")
        if not any(one.frequency is place for one in vanishing):
            return None
        other = decide([one for one in self._crossings if not any(one is gone for gone in vanishing)])
        if other.absent is not None:
            return Fragile(f"{REMOVED.format(what=self._what)}; without it {other.absent.reason}")
        return Fragile(REMOVED.format(what=self._what), other.enclose)
