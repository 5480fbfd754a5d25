"""Hulls of many pieces at once, in floats with proved errors: which pieces can reach a level, and which cannot.

On a stretch of length h, y^(k) lies between its values at both ends, widened by h^2/8 times the greatest |y^(k+2)|
there (linear interpolation). The two values and the terms of the bound are rows times the state at the sample, and the
state j samples later is M^j times it: so the rows times M^j, once for all, serve every block of samples. Floats: a
product of a row r and a state x, both known to within dr and dx, is off by at most |r| dx + dr (|x| + dx) and
(n + 2) 2^-52 |r| |x| of rounding; the bound itself is taken a little larger for its own rounding.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import cached_property
from typing import Any

import numpy as np
from flint import acb, acb_mat, arb, arb_mat, fmpq
from numpy.typing import NDArray

from specgate.sampled.shapes import Shapes
from specgate.terms.precision import working_precision

BLOCK = 64
"""Samples that are looked at together."""

_BITS = 128
_UNIT = 2.0**-52
_MORE = 1.0 + 1e-9

Floats = NDArray[np.float64]
Terms = Sequence[tuple[acb, acb_mat]]


class Hulls:
    """Hulls of one derivative over blocks of pieces from the first sample on.

    ways, lengths: of each stretch, the states at its start as rows over that at the sample, and how long it is.
    step: the state at the next sample, as rows over that at the sample. state: that at a sample.
    """

    def __init__(
        self,
        shapes: Shapes,
        order: int,
        ways: Sequence[arb_mat],
        lengths: Sequence[fmpq],
        step: arb_mat,
        state: Callable[[int], arb_mat],
    ) -> None:
        self._shapes, self._order = shapes, order
        self._ways, self._lengths, self._step, self._state = ways, lengths, step, state
        self._known: dict[int, tuple[Floats, Floats]] = {}

    def block(self, number: int) -> tuple[Floats, Floats]:
        """Return least and greatest values of the pieces of a block of samples, in order of time."""
        if number not in self._known:
            self._known[number] = self._hulls(self._state(number * BLOCK))
        return self._known[number]

    def _hulls(self, state: arb_mat) -> tuple[Floats, Floats]:
        x = np.array([float(entry.mid()) for entry in state.entries()])
        dx = np.array([float(entry.rad()) for entry in state.entries()]) + np.abs(x) * _UNIT
        values, errors = [], []
        for rows, radii in self._tables:
            size = np.abs(rows)
            values.append(rows @ x)
            off = size @ dx + radii @ (np.abs(x) + dx) + (len(x) + 2) * _UNIT * (size @ np.abs(x))
            errors.append(off * _MORE + 1e-300)
        (start, end, *bends), (off_start, off_end, *off_bends) = values, errors
        bend = sum((np.abs(v) + e for v, e in zip(bends, off_bends, strict=True)), np.zeros_like(start))
        wide = np.maximum(off_start, off_end) + bend * self._eighths * _MORE
        wide = wide + (np.abs(start) + np.abs(end)) * _UNIT
        return np.minimum(start, end) - wide, np.maximum(start, end) + wide

    @cached_property
    def _eighths(self) -> Floats:
        """h^2/8 of every piece of a block, rounded up."""
        return np.tile([float(h) ** 2 / 8 * _MORE for h in map(_float, self._lengths)], BLOCK)

    @cached_property
    def _tables(self) -> list[tuple[Floats, Floats]]:
        """Rows of all pieces of a block: values at both ends, then the terms of the bound; with their radii."""
        parts = [self._rows(way, length) for way, length in zip(self._ways, self._lengths, strict=True)]
        count = max(len(rows) for rows in parts)
        size = int(self._step.nrows())
        zero = [arb(0)] * size
        stacked = [row for rows in parts for row in (*rows, *([zero] * (count - len(rows))))]
        found = []
        with working_precision(_BITS):
            power = arb_mat(stacked)
            for _ in range(BLOCK):
                found.append(power.tolist())
                power = power * self._step
        middle = np.array([[[float(e.mid()) for e in row] for row in rows] for rows in found])
        radius = np.array([[[float(e.rad()) for e in row] for row in rows] for rows in found])
        radius = (radius + np.abs(middle) * _UNIT) * _MORE
        shape = (BLOCK * len(parts), count, size)
        middle, radius = middle.reshape(shape), radius.reshape(shape)
        return [(middle[:, k, :], radius[:, k, :]) for k in range(count)]

    def _rows(self, way: arb_mat, length: fmpq) -> list[list[arb]]:
        """Return the rows of one stretch over the state at the sample."""
        terms = derived(self._shapes.rows(_BITS), self._order)
        curved = derived(terms, 2)
        with working_precision(_BITS):
            wide = acb_mat(way)
            ends = [_real(_at(terms, time) * wide) for time in (arb(0), arb(length))]
            bends: list[list[arb]] = []
            for pole, weights in curved:
                growth = (pole.real * length).exp()
                most = growth.union(arb(1)).upper()
                for power, row in enumerate((weights * wide).tolist()):
                    top = most * arb(length) ** power
                    bends.append([entry.real * top for entry in row])
                    if not pole.imag.is_zero():
                        bends.append([entry.imag * top for entry in row])
        return [*ends, *bends]


def derived(terms: Terms, times: int) -> Terms:
    """Return the terms of a derivative: sum c_j t^j e^(pt) has the coefficients p c_j + (j + 1) c_(j+1)."""
    with working_precision(_BITS):
        for _ in range(times):
            terms = [(pole, _derived(pole, weights)) for pole, weights in terms]
    return terms


def _derived(pole: acb, weights: acb_mat) -> acb_mat:
    rows: list[Any] = weights.tolist()
    return acb_mat(
        [
            [pole * c + (j + 1) * rows[j + 1][k] if j + 1 < len(rows) else pole * c for k, c in enumerate(row)]
            for j, row in enumerate(rows)
        ]
    )


def _at(terms: Terms, time: arb) -> acb_mat:
    """Return a value at a time into the stretch, as a row; its real part counts."""
    columns = int(terms[0][1].ncols()) if terms else 0
    total = acb_mat(1, columns)
    for pole, weights in terms:
        growth = (pole * time).exp()
        powers = acb_mat(1, int(weights.nrows()), [growth * time**j for j in range(int(weights.nrows()))])
        total = total + powers * weights
    return total


def _real(row: acb_mat) -> list[arb]:
    return [entry.real for entry in row.entries()]


def _float(value: fmpq) -> float:
    return int(value.p) / int(value.q)
