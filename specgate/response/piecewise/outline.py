"""Points of a piecewise response for drawing, both sides of every kink among them."""

from __future__ import annotations

from collections.abc import Sequence

from flint import arb, fmpq

from specgate.response.piecewise.climbing import value_at
from specgate.response.piecewise.patches import Ground

_BITS = 64
_LEFT = fmpq(1, 100)
"""Part of the size of the response that is left where a drawing ends."""

_UNSETTLED = 40
"""Radians, or pieces, that are drawn of a response that does not settle."""
_PERIODS = 6
"""Periods that are drawn at least of a response to something that goes on for ever."""


def outline(ground: Ground, size: fmpq | None, known: Sequence[fmpq], most: int) -> tuple[tuple[fmpq, arb], ...]:
    """Return at most `most` pairs (time, value), in order of time; size: of a response that settles.

    Kinks take at most half of them, known instants a quarter; the others are even in time.
    """
    window = _window(ground, size)
    kinks = [begin for index, begin, _ in ground.kinks(window) if index > 0]
    kinks = kinks if 4 * len(kinks) <= most else []
    fixed = sorted({time for time in known if 0 < time < window})[: most // 4]
    even = most - 1 - len(fixed) - 2 * len(kinks)
    times = sorted({fmpq(0), *fixed, *kinks, *(window * k / even for k in range(1, even + 1))})
    points: list[tuple[fmpq, arb]] = []
    for time in times:
        index = ground.index(time)
        if time in kinks:
            points.append((time, value_at(ground.pieces, index - 1, 0, time, _BITS)))
        points.append((time, value_at(ground.pieces, index, 0, time, _BITS)))
    return tuple(points[:most])


def _window(ground: Ground, size: fmpq | None) -> fmpq:
    """Return where a drawing ends: a little after the response is near its final value, or after some periods."""
    settled = None if size is None else ground.pieces.settled_by(size * _LEFT)
    if settled is not None:
        return settled * 5 / 4 if settled > 0 else fmpq(1)
    for index, begin, end in ground.kinks(None):
        if end is None:
            speed = ground.pieces.speed(index)
            return begin + (fmpq(*(_UNSETTLED / speed).as_integer_ratio()) if speed > 0.0 else 1)
        if index >= _UNSETTLED:
            period = ground.pieces.period()
            return end if period is None else max(end, _PERIODS * period)
    return fmpq(1)
