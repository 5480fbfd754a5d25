"""Axes: from values to pixels, with few and round ticks."""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence

from specgate.report.digits import MINUS
from specgate.terms.records import record


@record
class Scale:
    """A linear scale that takes [low, high] to [start, end] in pixels."""

    low: float
    high: float
    start: float
    end: float

    def __call__(self, value: float) -> float:
        """Return the pixel of `value`."""
        return self.start + (value - self.low) / (self.high - self.low) * (self.end - self.start)

    def holds(self, value: float) -> bool:
        """Tell whether a value lies on the scale."""
        return self.low <= value <= self.high

    def ticks(self, about: int) -> Iterator[tuple[float, str]]:
        """Yield round values (1, 2 or 5 times a power of ten apart) with their texts."""
        step = round_step((self.high - self.low) / about)
        first = math.ceil(self.low / step - 1e-9)
        last = math.floor(self.high / step + 1e-9)
        for k in range(first, last + 1):
            yield k * step, tick_text(k * step, step)


@record
class LogScale:
    """A scale by powers of ten that takes [low, high], both above zero, to [start, end] in pixels."""

    low: float
    high: float
    start: float
    end: float

    def __call__(self, value: float) -> float:
        """Return the pixel of `value`, which is above zero."""
        share = (math.log10(value) - math.log10(self.low)) / (math.log10(self.high) - math.log10(self.low))
        return self.start + share * (self.end - self.start)

    def holds(self, value: float) -> bool:
        """Tell whether a value lies on the scale."""
        return self.low <= value <= self.high

    def decades(self) -> Iterator[tuple[float, str]]:
        """Yield the powers of ten with their texts, every second or third one where there are many."""
        first, last = math.ceil(math.log10(self.low) - 1e-9), math.floor(math.log10(self.high) + 1e-9)
        step = max(1, math.ceil((last - first) / 8))
        for power in range(first, last + 1, step):
            yield 10.0**power, f"{10.0**power:g}" if -4 <= power <= 4 else f"1e{power}".replace("-", MINUS)

    def between(self) -> Iterator[float]:
        """Yield 2, 3 … 9 times each power of ten that lie on the scale."""
        for power in range(math.floor(math.log10(self.low)), math.ceil(math.log10(self.high))):
            yield from (value for k in range(2, 10) if self.holds(value := k * 10.0**power))


def clipped(points: Sequence[tuple[float, float]], low: float, high: float) -> list[list[tuple[float, float]]]:
    """Return the pieces of a line whose second coordinates lie in [low, high], cut where it passes an end."""
    pieces: list[list[tuple[float, float]]] = [[]]
    for start, end in itertools.pairwise(points):
        inside = _inside(start, end, low, high)
        if inside is None:
            pieces.append([])
            continue
        if not pieces[-1] or pieces[-1][-1] != inside[0]:
            pieces.append([inside[0]])
        pieces[-1].append(inside[1])
    return [piece for piece in pieces if len(piece) > 1]


def _inside(
    start: tuple[float, float], end: tuple[float, float], low: float, high: float
) -> tuple[tuple[float, float], tuple[float, float]] | None:
    """Return the stretch of a straight line between two levels, None where there is none."""
    rise = end[1] - start[1]
    if rise == 0:
        return (start, end) if low <= start[1] <= high else None
    shares = sorted(((low - start[1]) / rise, (high - start[1]) / rise))
    first, last = max(0.0, shares[0]), min(1.0, shares[1])
    if first >= last:
        return None
    ends = [(start[0] + share * (end[0] - start[0]), start[1] + share * rise) for share in (first, last)]
    return (start if first == 0 else ends[0]), (end if last == 1 else ends[1])


def simplified(points: Sequence[tuple[float, float]], tolerance: float) -> list[tuple[float, float]]:
    """Return the points that a line needs to stay within `tolerance` of all of them (Douglas, Peucker 1973)."""
    kept = {0, len(points) - 1}
    waiting = [(0, len(points) - 1)]
    while waiting:
        first, last = waiting.pop()
        farthest, distance = first, tolerance
        for k in range(first + 1, last):
            off = _off(points[k], points[first], points[last])
            if off > distance:
                farthest, distance = k, off
        if farthest != first:
            kept.add(farthest)
            waiting += [(first, farthest), (farthest, last)]
    return [points[k] for k in sorted(kept)]


def _off(point: tuple[float, float], start: tuple[float, float], end: tuple[float, float]) -> float:
    """Return the distance of a point from the stretch between two others."""
    dx, dy = end[0] - start[0], end[1] - start[1]
    across, down = point[0] - start[0], point[1] - start[1]
    length = dx * dx + dy * dy
    share = 0.0 if length == 0 else min(1.0, max(0.0, (across * dx + down * dy) / length))
    return math.hypot(across - share * dx, down - share * dy)


def round_step(at_least: float) -> float:
    """Return the smallest of 1, 2, 5 times a power of ten that is not below `at_least`."""
    power = 10.0 ** math.floor(math.log10(at_least))
    return next((m * power for m in (1, 2, 5) if m * power >= at_least * (1 - 1e-9)), 10 * power)


def tick_text(value: float, step: float) -> str:
    """Return a tick's label with the digits that tell it from its neighbours; long ones with a power of ten."""
    finest = math.floor(math.log10(step) + 1e-9)
    decimals = max(0, -finest)
    if value and not 1e-4 <= abs(value) < 1e6:
        digits = max(0, math.floor(math.log10(abs(value)) + 1e-9) - finest)
        mantissa, power = f"{value:.{digits}e}".split("e")
        short = mantissa.rstrip("0").rstrip(".") if "." in mantissa else mantissa
        return f"{short}e{int(power)}".replace("-", MINUS)
    return f"{value:.{decimals}f}".replace("-", MINUS) if round(value, decimals) else "0"


def widened(low: float, high: float, by: float) -> tuple[float, float]:
    """Return a range with a share `by` of its length added on both sides; never empty."""
    if high <= low:
        half = abs(low) * 0.1 or 1.0
        return low - half, high + half
    return low - by * (high - low), high + by * (high - low)
