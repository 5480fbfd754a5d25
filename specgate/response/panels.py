"""Taylor panels: a response whose modes all but cancel, sampled from its own Taylor polynomials.

About the centre c of a panel of half-width r every living mode c' t^i e^(pt) has the coefficients
c' p^(k-i) / (k-i)! of t^k. They are summed in balls, where the cancellation happens at full precision, and only the sum
becomes floats.

Errors, for x = t / r in [-1, 1] and the coefficients b_k of x^k: the rounding of x, of its powers, of b_k and of the
sum is below (5 n + 6) u sum |b_k|; to it come the radii of the b_k, the remainder and the modes that are left out. The
remainder after t^n of a derivative of order d is at most sup |f^(q)| r^(q-d) / (q-d)! with q = n + 1, and
|f^(q)| <= |c'| e^(|sigma| r) |p|^(q-i) (|p| r + q)^i for every term. A mode is left out (it is dead) once its envelope
is 2^-80 of the largest one, less where modes cancel; the envelopes of its derivatives over the panel are added to every
bound.
"""

from __future__ import annotations

from functools import cache, cached_property
from math import ceil, factorial, log2, perm

import numpy as np
from flint import acb, acb_mat, arb, fmpq
from numpy.typing import NDArray

from specgate.response.budget import OutOfWork
from specgate.response.cells import Cells, cells_between
from specgate.response.deviation import LOWEST, Modal
from specgate.response.grid import Block
from specgate.response.modes import Expansion
from specgate.response.segments import UNIT_ROUNDOFF, Floats, at_most, exact, float_of
from specgate.response.tables import SLACK, TINY
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_REACH = 2.0
"""Half-width of a panel in time constants of the fastest living mode."""

_DEAD = 2.0**-60
"""Part of the largest envelope, and of what is left of it after cancellation, that a mode must have to be kept."""

_QUITE_DEAD = 2.0**-120
"""The same for a closer look, in parts of _DEAD."""
_SHORTEST = 2.0**-180
"""Width of a panel at least: its fifth power is a divisor."""

_ORDERS = 6
_MOST_HALVINGS = 6


@record
class TaylorPanel:
    """g(start + t) for 0 <= t <= 2 half, as polynomials in x = t / half - 1.

    weights: coefficients of g, g', g'', shape (n + 1, 3). errors: their error bounds, shape (3,). limits: bounds of the
    derivatives 2 ... 5, shape (4,).
    """

    start: fmpq
    half: float
    weights: Floats
    errors: Floats
    limits: Floats

    def sample(self, times: Floats) -> tuple[Floats, Floats]:
        """Return g, g', g'' and their error bounds, both of shape (n, 3)."""
        powers = np.empty((len(times), len(self.weights)))
        powers[:, 0] = 1.0
        powers[:, 1:] = (times / self.half - 1.0)[:, None]
        np.multiply.accumulate(powers, axis=1, out=powers)
        return powers @ self.weights, np.broadcast_to(self.errors, (len(times), 3))

    def bounds(self, left: Floats, right: Floats) -> Floats:
        """Return bounds of the derivatives 2 ... 5, the same on the whole panel."""
        return np.broadcast_to(self.limits, (len(left), 4))


class PanelLayout:
    """Plans the blocks: one octave each, in equal panels."""

    def __init__(self, deviation: Modal, first: float, resolution: float) -> None:
        self._first = first
        self._resolution = resolution
        self._deviation = deviation

    @cached_property
    def _maker(self) -> PanelMaker:
        return PanelMaker(self._deviation)

    def block(self, before: list[Block]) -> Block:
        """Return the block that follows."""
        left = before[-1].end if before else self._first
        speed = self._maker.speed(left)
        wanted = left * speed / (2.0 * _REACH)
        return _Octave(self._maker, left, 1 << max(1, ceil(log2(max(wanted, 1.0)))), self._resolution)


def _precision(change: float) -> tuple[int, int]:
    """Return bits and degree that leave some 20 digits of what is left after cancellation."""
    if change > 2.0**-60:
        return LOWEST, 40
    return (256, 56) if change > 2.0**-160 else (512, 96)


@record
class _Octave:
    """The octave [left, 2 left] in `chunks` panels."""

    maker: PanelMaker
    left: float
    chunks: int
    resolution: float

    @property
    def end(self) -> float:
        return 2.0 * self.left

    def index(self, time: fmpq) -> int:
        number = ((time / exact(self.left) - 1) * self.chunks).floor()
        return min(self.chunks - 1, max(0, int(number)))

    def time(self, index: int) -> float:
        return self.left * (1.0 + index / self.chunks)

    def cells(self, index: int) -> Cells:
        width = self.left / self.chunks
        panel = self.maker.panel(exact(self.left) + index * exact(width), width / 2.0)
        wanted = width * (float(panel.limits[2]) / 384.0 / self.resolution) ** 0.25
        count = 1 << max(0, min(ceil(log2(max(wanted, 1.0))), _MOST_HALVINGS))
        nodes: Floats = width / count * np.arange(count + 1, dtype=np.float64)
        return cells_between(panel, nodes[None, :])


class PanelMaker:
    """Makes panels of one response; the matrix from modes to Taylor coefficients is kept for equal panels."""

    def __init__(self, deviation: Modal) -> None:
        bits, degree = _precision(deviation.change)
        self._deviation = deviation
        self._expansion = deviation.at(bits)
        self._degree = degree
        self._dead = _DEAD * min(deviation.change, 2.0**-20)
        self._matrices: dict[tuple[float, tuple[int, ...]], acb_mat] = {}

    def speed(self, left: float) -> float:
        """Return the largest |p| of a mode that lives at `left`."""
        speeds = self._speeds[self._living(left, 1.5 * left)[0]]
        return float(speeds.max(initial=0.0))

    @cached_property
    def _speeds(self) -> Floats:
        return np.array([float(abs(mode.pole).upper()) for mode in self._expansion.modes])

    def _living(self, left: float, right: float, closeness: float = 1.0) -> tuple[NDArray[np.intp], Floats]:
        """Return the modes that live on an interval and bounds of the derivatives 0 ... 5 of all others together."""
        columns = self._deviation.table.envelopes(np.array([left]), np.array([right]))[0]
        lengths = [len(mode.coefficients) for mode in self._expansion.modes]
        modes = np.add.reduceat(columns, np.cumsum([0, *lengths[:-1]]), axis=0)
        last = self._deviation.table.envelopes(np.array([right]), np.array([right]))[0, :, 0].max()
        living = modes[:, 0] > closeness * self._dead * last
        return np.flatnonzero(living), modes[~living].sum(axis=0)

    def panel(self, start: fmpq, half: float, closeness: float = 1.0) -> TaylorPanel:
        """Return the Taylor polynomials of g about start + half, without modes that are dead (at this closeness)."""
        if half < 0.5 * _SHORTEST:
            raise OutOfWork("a stretch of the response is too short for a panel of its own")
        left = float_of(start)
        living, dead = self._living(left, left + 2.0 * half, closeness)
        local = self._expansion.only(living.tolist()).rebased(start + exact(half))
        with working_precision(local.bits):
            columns = [c for mode in local.modes for c in mode.coefficients]
            matrix = self._matrix(half, tuple(living.tolist()), local)
            balls = [entry.real for entry in (matrix * acb_mat(len(columns), 1, columns)).entries()]
        return _in_floats(balls, start, half, _remainders(local, half, self._degree) + dead)

    def closer(self, cells: Cells, first: int, last: int, parts: int) -> Cells | None:
        """Return a run of cells, in equal parts, on a panel of its own that rounds in the measure of what it sees.

        None: the run is too long for one panel, or too short for floats to scale.
        """
        start = cells.segment.start + exact(float(cells.left[first]))
        width = float(cells.right[last]) - float(cells.left[first])
        left = float_of(start)
        living, _ = self._living(left, left + width, _QUITE_DEAD)
        if width < _SHORTEST or width * float(self._speeds[living].max(initial=0.0)) > 2.0 * _REACH:
            return None
        nodes: Floats = width / parts * np.arange(parts + 1, dtype=np.float64)
        return cells_between(self.panel(start, width / 2.0, _QUITE_DEAD), nodes[None, :])

    def _matrix(self, half: float, living: tuple[int, ...], local: Expansion) -> acb_mat:
        """Return the coefficients of x^k, k = 0 ... n, of every t^i e^(pt)."""
        key = (half, living)
        if key not in self._matrices:
            columns = [
                _powers(mode.pole, i, half, self._degree) for mode in local.modes for i in range(len(mode.coefficients))
            ]
            entries = [column[k] for k in range(self._degree + 1) for column in columns]
            self._matrices[key] = acb_mat(self._degree + 1, len(columns), entries)
        return self._matrices[key]


def _powers(pole: acb, i: int, half: float, degree: int) -> list[acb]:
    """Return p^(k-i) half^k / (k-i)! for k = 0 ... degree, zero for k < i."""
    column = [acb(0)] * min(i, degree + 1)
    term, turn = acb(arb(half) ** i), pole * half
    for k in range(i, degree + 1):
        column.append(term)
        term = term * turn / (k - i + 1)
    return column


def _remainders(local: Expansion, half: float, degree: int) -> Floats:
    """Return bounds of what the derivatives 0 ... 5 lack beyond the polynomials."""
    rows = [
        (at_most(abs(c)), float(i), speed, decay)
        for mode in local.modes
        for speed, decay in [(at_most(abs(mode.pole)), at_most(abs(mode.pole.real)))]
        for i, c in enumerate(mode.coefficients)
    ]
    size, power, speed, decay = np.array(rows, dtype=np.float64).reshape(-1, 4).T
    q, turns = degree + 1, speed * half
    parts = size * np.exp(np.minimum(decay * half, 700.0)) * turns ** (q - power) * (turns + q) ** power * half**power
    scales = np.array([half**d * factorial(q - d) for d in range(_ORDERS)], dtype=np.float64)
    return np.asarray(SLACK * parts.sum() / scales, dtype=np.float64)


@cache
def _factors(count: int) -> list[Floats]:
    """Return k! / (k - order)! for k = order ... count - 1, for the orders 0 ... 5."""
    return [np.array([perm(k, order) for k in range(order, count)], dtype=np.float64) for order in range(_ORDERS)]


def _in_floats(balls: list[arb], start: fmpq, half: float, rest: Floats) -> TaylorPanel:
    """Round the coefficients of x^k to floats; rest: bounds of what they lack, for the derivatives 0 ... 5."""
    count = len(balls)
    middle = np.array([float(ball) for ball in balls])
    radius = np.array([float(ball.rad()) for ball in balls])
    weights, errors, limits = np.zeros((count, 3)), np.zeros(3), np.zeros(_ORDERS)
    for order, factor in enumerate(_factors(count)):
        derived = middle[order:] * factor / half**order
        size = float(np.abs(derived).sum())
        limits[order] = size + float((radius[order:] * factor).sum()) / half**order + rest[order]
        if order < 3:
            weights[: count - order, order] = derived
            errors[order] = (5 * count + 10) * UNIT_ROUNDOFF * size + limits[order] - size
    return TaylorPanel(start, half, weights, SLACK * errors + TINY, SLACK * limits[2:] + TINY)
