"""Loops with dead time integrated by Taylor series step by step in mpmath: no transform, no pole, no ball.

x' = A x + B w with w = sum of gains times delayed states and the input; every delay is a whole number of steps, so that
a step reads the series of an earlier one as it is.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from functools import cached_property

import mpmath

ORDER = 34


@dataclass
class Chain:
    """Blocks in series, each num/den (highest power first) with a dead time, closed by minus one or left open."""

    blocks: Sequence[tuple[Sequence[Fraction], Sequence[Fraction], Fraction]]
    closed: bool = True
    step: Fraction = Fraction(1, 20)
    digits: int = 40
    _series: list[list[list[mpmath.mpf]]] = field(default_factory=list)

    def at(self, time: Fraction) -> mpmath.mpf:
        """Return the output at a time, for a unit step at the first block's input."""
        with mpmath.workdps(self.digits):
            index = int(time // self.step)
            while len(self._series) <= index:
                self._advance()
            return _value(self._output(index), _mp(time - index * self.step))

    def _output(self, index: int) -> list[mpmath.mpf]:
        return self._series[index][-1]

    def _advance(self) -> None:
        """Add the series of the next step: of the states of each block, then of each block's (delayed) output."""
        index = len(self._series)
        states = self._states(index)
        outputs: list[list[mpmath.mpf]] = [[] for _ in self.blocks]
        coefficients = [[list(x)] for x in states]
        for k in range(ORDER):
            entering = self._entering(index, k, outputs)
            for number, (row, direct, feedback, delay) in enumerate(self._forms):
                n = len(feedback)
                x = coefficients[number]
                now = sum((c * x[k][i] for i, c in enumerate(row)), mpmath.mpf(0)) + direct * entering
                self._keep(index, number, now)
                late = self._late(index, number, k, delay, now)
                outputs[number].append(late)
                following = [x[k][i + 1] / (k + 1) for i in range(n - 1)]
                if n:
                    following.append((sum(c * x[k][i] for i, c in enumerate(feedback)) + entering) / (k + 1))
                x.append(following)
                entering = late
        self._series.append([*self._flat(coefficients), *outputs])
        self._last = coefficients

    @cached_property
    def _forms(self) -> list[tuple[list[mpmath.mpf], mpmath.mpf, list[mpmath.mpf], Fraction]]:
        """Output row, feed-through, last row of A, and dead time of each block, in controllable form."""
        return [
            (_row(above, below), _direct(above, below), [-_mp(c / below[0]) for c in list(below)[:0:-1]], delay)
            for above, below, delay in self.blocks
        ]

    def _entering(self, index: int, k: int, outputs: list[list[mpmath.mpf]]) -> mpmath.mpf:
        """Return the coefficient of what enters the first block; the loop must hold a dead time."""
        driven = mpmath.mpf(1 if k == 0 else 0)
        if not self.closed:
            return driven
        delay = self.blocks[-1][2]
        if delay == 0:
            raise ValueError("the last block of a closed chain has a dead time")
        return driven - self._late(index, len(self.blocks) - 1, k, delay, mpmath.mpf(0))

    def _keep(self, index: int, number: int, value: mpmath.mpf) -> None:
        self._now.setdefault((index, number), []).append(value)

    def _late(self, index: int, number: int, k: int, delay: Fraction, now: mpmath.mpf) -> mpmath.mpf:
        steps = delay / self.step
        assert steps.denominator == 1
        if steps == 0:
            return now
        before = self._now.get((index - int(steps), number))
        return before[k] if before is not None else mpmath.mpf(0)

    def _states(self, index: int) -> list[list[mpmath.mpf]]:
        if index == 0:
            self._now: dict[tuple[int, int], list[mpmath.mpf]] = {}
            return [[mpmath.mpf(0)] * (len(below) - 1) for _, below, _ in self.blocks]
        h = _mp(self.step)
        return [
            [sum(x[k][i] * h**k for k in range(ORDER + 1)) for i in range(len(x[0]))] if x[0] else []
            for x in self._last
        ]

    @staticmethod
    def _flat(coefficients: list[list[list[mpmath.mpf]]]) -> list[list[mpmath.mpf]]:
        return [[one[i] for one in x] for x in coefficients for i in range(len(x[0]))]


def _row(above: Sequence[Fraction], below: Sequence[Fraction]) -> list[mpmath.mpf]:
    """Return C of the controllable form: lowest power first."""
    n = len(below) - 1
    padded = [Fraction(0)] * (n + 1 - len(above)) + list(above)
    direct = padded[0] / below[0]
    return [_mp((a - direct * b) / below[0]) for a, b in zip(padded[:0:-1], list(below)[:0:-1], strict=True)]


def _direct(above: Sequence[Fraction], below: Sequence[Fraction]) -> mpmath.mpf:
    return _mp(above[0] / below[0]) if len(above) == len(below) else mpmath.mpf(0)


def _mp(value: Fraction) -> mpmath.mpf:
    return mpmath.mpf(value.numerator) / value.denominator


def _value(series: Sequence[mpmath.mpf], x: mpmath.mpf) -> mpmath.mpf:
    total = mpmath.mpf(0)
    for coefficient in reversed(series):
        total = total * x + coefficient
    return total
