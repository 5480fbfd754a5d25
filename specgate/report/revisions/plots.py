"""Old and new response in one plot, for the responses that run otherwise."""

from __future__ import annotations

from collections.abc import Sequence

from specgate.report import anchors
from specgate.report.figures.overlay import OverlayFigure
from specgate.report.words import listed
from specgate.revisions.types import ResponseDifference
from specgate.terms.records import record


@record
class Plot:
    """A response: its name, the requirements on it, and its picture; else why there is none."""

    name: str
    requirements: str
    figure: OverlayFigure | None
    reason: str


def plots(responses: Sequence[ResponseDifference]) -> tuple[Plot, ...]:
    """Return the responses that requirements are on first, then the others."""
    ordered = sorted(responses, key=lambda one: (not one.requirements, one.loop, one.response))
    return tuple(_plot(one) for one in ordered)


def _plot(one: ResponseDifference) -> Plot:
    name = f"{one.loop}.{one.response}"
    reason = _missing(one)
    figure = None if reason else _figure(one, name)
    return Plot(name, listed(one.requirements), figure, reason)


def _missing(one: ResponseDifference) -> str:
    if one.old.unit != one.new.unit:
        units = f"{one.old.signal} in {one.old.unit} before, {one.new.signal} in {one.new.unit} now"
        return f"two things that have no common axis: {units}"
    lacking = [
        which for which, side in (("old", one.old), ("new", one.new)) if side.curve is None or not side.curve.time
    ]
    return f"there is no curve of the {listed(lacking)} response" if lacking else ""


def _figure(one: ResponseDifference, name: str) -> OverlayFigure | None:
    if one.old.curve is None or one.new.curve is None:
        return None
    signal = one.new.signal if one.old.signal == one.new.signal else f"{one.old.signal} before, {one.new.signal} now"
    return OverlayFigure(
        name=anchors.plot(one.loop, one.response),
        title=f"{name}: {signal} over time, old and new",
        signal=signal,
        unit=one.new.unit,
        old=(one.old.curve.time, one.old.curve.value),
        new=(one.new.curve.time, one.new.curve.value),
    )
