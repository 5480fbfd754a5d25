"""How the modes of a sampled loop are shown: as modes in s, s = ln(z)/T, beside those of other loops."""

from __future__ import annotations

import math
from dataclasses import replace

from specgate.review.types import LoopReview, Pole


def poles(loop: LoopReview) -> tuple[Pole, ...]:
    """Return the poles of a loop in s; of a sampled one those at z = 0, which are gone after a few samples, left out.

    What is shown of them is derived for the reader and claims no more digits than it has.
    """
    if loop.in_z is None:
        return loop.poles
    above, _, below = loop.in_z.period.partition("/")
    period = int(above) / int(below or "1")
    return tuple(_in_s(pole, period) for pole in loop.poles if math.hypot(pole.real, pole.imaginary) > pole.radius)


def _in_s(pole: Pole, period: float) -> Pole:
    size = math.hypot(pole.real, pole.imaginary)
    decay, turn = math.log(size) / period, math.atan2(pole.imaginary, pole.real) / period
    return replace(pole, real=_short(decay), imaginary=_short(turn), radius=pole.radius / size / period)


def _short(value: float) -> float:
    return float(f"{value:.9g}")
