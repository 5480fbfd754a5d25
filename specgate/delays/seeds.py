"""Where the roots of a quasi-polynomial may be: a float search that proves nothing and only saves work.

In a rectangle of the upper half plane the zero lines of the real and of the imaginary part are followed on a grid; a
grid cell that both pass is a guess. Roots far smaller than a cell are guessed from rational approximants. All are
bettered by Newton's steps together.
"""

from __future__ import annotations

from math import pi

import numpy as np
from flint import fmpq, fmpq_poly
from numpy.typing import NDArray

from specgate.systems.quasi import Quasi

Complexes = NDArray[np.complex128]

_MOST_POINTS = 400_000


def seeds(quasi: Quasi, left: float, height: float, fineness: float = 1.0, right: float = 0.0) -> list[complex]:
    """Return guesses of the roots with left <= Re s and 0 <= Im s, on the grid up to a height, in no order."""
    function = _Floats(quasi)
    with np.errstate(all="ignore"):
        guesses = np.concatenate([_grid(function, (left, right), height, fineness), _rational(quasi)])
        found = function.bettered(guesses)
    inside = np.isfinite(found) & (found.real > left) & (found.imag > -1e-9 * (1.0 + np.abs(found)))
    return _distinct(found[inside])


class _Floats:
    def __init__(self, quasi: Quasi) -> None:
        self.delays = [_float(delay) for delay, _ in quasi.terms]
        self.values = [_floats(p) for _, p in quasi.terms]
        self.slopes = [_floats(p.derivative() - p * delay) for delay, p in quasi.terms]

    def of(self, polynomials: list[NDArray[np.float64]], s: Complexes) -> Complexes:
        total = np.zeros_like(s)
        for delay, polynomial in zip(self.delays, polynomials, strict=True):
            total += np.polyval(polynomial, s) * np.exp(-delay * s)
        return total

    def bettered(self, s: Complexes) -> Complexes:
        for _ in range(40):
            step = self.of(self.values, s) / self.of(self.slopes, s)
            s = s - step
            if not np.any(np.abs(step) > 1e-14 * np.abs(s)):
                break
        settled = np.abs(step) <= 1e-9 * np.abs(s)
        chosen: Complexes = s[settled]
        return chosen


def _grid(function: _Floats, across: tuple[float, float], height: float, fineness: float) -> Complexes:
    left, right = across
    longest = max(function.delays)
    step = min(pi / (8.0 * fineness * longest), -left / (6.0 * fineness))
    columns, rows = int((right - left) / step) + 3, int(height / step) + 3
    if columns * rows > _MOST_POINTS:
        return np.zeros(0, dtype=np.complex128)
    real = left - step + step * np.arange(columns)
    imaginary = -0.37 * step + step * np.arange(rows)
    points = real[None, :] + 1j * imaginary[:, None]
    values = function.of(function.values, points)
    passes = _changes(values.real > 0) & _changes(values.imag > 0)
    corners: Complexes = points[:-1, :-1][passes] + step * (0.5 + 0.5j)
    return corners


def _changes(positive: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Return for each cell whether its corners differ."""
    corners = positive[:-1, :-1].astype(int) + positive[1:, :-1] + positive[:-1, 1:] + positive[1:, 1:]
    changes: NDArray[np.bool_] = (corners > 0) & (corners < 4)
    return changes


def _rational(quasi: Quasi) -> Complexes:
    """Return roots of what (1 - s t/2)/(1 + s t/2) for e^(-t s) gives, and those of the undelayed term."""
    below = [np.array([_float(delay) / 2.0, 1.0]) for delay, _ in quasi.delayed]
    total = np.array([0.0])
    for index, (delay, polynomial) in enumerate(quasi.terms):
        term = _floats(polynomial)
        offset = len(quasi.terms) - len(below)
        for number, factor in enumerate(below):
            own = number + offset == index
            term = np.polymul(term, np.array([-_float(delay) / 2.0, 1.0]) if own else factor)
        total = np.polyadd(total, term)
    found: Complexes = np.concatenate([np.roots(total), np.roots(_floats(quasi.undelayed))]).astype(np.complex128)
    return np.where(found.imag < 0, found.conj(), found)


def _distinct(found: Complexes) -> list[complex]:
    result: list[complex] = []
    for value in sorted(map(complex, found), key=lambda s: (-s.real, s.imag)):
        root = complex(value.real, abs(value.imag))
        if all(abs(root - known) > 1e-9 * (abs(root) + abs(known)) for known in result):
            result.append(root)
    return result


def _floats(p: fmpq_poly) -> NDArray[np.float64]:
    return np.array([_float(c) for c in reversed(p.coeffs())] or [0.0], dtype=np.float64)


def _float(value: fmpq) -> float:
    return int(value.p) / int(value.q)
