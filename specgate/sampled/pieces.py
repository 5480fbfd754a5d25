"""The response of a sampled loop, at and between its samples, as smooth pieces from jump to jump."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable
from functools import cached_property

from flint import acb_mat, arb, arb_mat, fmpq, fmpq_mat, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.modes import Expansion
from specgate.response.pieces import Pieces
from specgate.sampled.cycle import Cycle
from specgate.sampled.decay import Decay, quadratic
from specgate.sampled.drive import Drive, Setting
from specgate.sampled.hulls import BLOCK, Hulls, derived
from specgate.sampled.lasting import side
from specgate.sampled.shapes import Shapes
from specgate.sampled.starting import start
from specgate.sampled.state_space import Row
from specgate.sampled.states import States
from specgate.terms.precision import working_precision

_GUARD = 96
_KEPT = 4096
_LOOKED = 512
"""Blocks of samples that are looked through for a likely summit."""
_BOUND_BITS = 256


class SampledPieces(Pieces):
    """y = c z + d (what is held), z with the states of the drive last, from rest.

    final: the limit of y, or why there is none. rest: the state at the samples that the loop comes to, where it does.
    """

    def __init__(self, cycle: Cycle, line: tuple[Row, Row], drive: Drive, final: fmpq | Absent, rest: Row) -> None:
        self._cycle = cycle
        self._line = line
        self._drive = drive
        self._final = final
        self._rest = rest
        self._shapes = Shapes(cycle.motion.a, cycle.motion.b, *line)
        self._first = int((drive.starts[-1][0] / cycle.period).ceil())
        self._ways: dict[int, list[arb_mat]] = {}
        self._starts: dict[int, tuple[list[arb_mat], States]] = {}
        self._expansions: dict[tuple[int, int], Expansion] = {}

    # --- where the pieces are -----------------------------------------------------------------------------

    @property
    def final(self) -> fmpq | Absent:
        """The limit of y, exact, or the reason why there is none."""
        return self._final

    @cached_property
    def _early(self) -> list[tuple[fmpq, int, int]]:
        """The pieces before the drive is set for the last time: start, period, stretch."""
        found = []
        sets = [time for time, _ in self._drive.starts]
        for period in range(self._first):
            begin = period * self._cycle.period
            for number, stretch in enumerate(self._cycle.stretches):
                start = begin + stretch.start
                inside = [time for time in sets if start < time < start + stretch.length]
                found += [(time, period, number) for time in [start, *inside]]
        return found

    def kink(self, index: int) -> fmpq:
        """Return where piece `index` begins (s)."""
        if index < len(self._early):
            return self._early[index][0]
        period, number = divmod(index - len(self._early), len(self._cycle.stretches))
        return (self._first + period) * self._cycle.period + self._cycle.stretches[number].start

    def holding(self, time: fmpq) -> int:
        """Return the piece that holds a time."""
        period = int((time / self._cycle.period).floor())
        if period < self._first:
            return bisect_right([start for start, _, _ in self._early], time) - 1
        inside = time - period * self._cycle.period
        number = sum(stretch.start <= inside for stretch in self._cycle.stretches) - 1
        return len(self._early) + (period - self._first) * len(self._cycle.stretches) + number

    def speed(self, index: int) -> float:
        """Return how fast the pieces vary (rad/s)."""
        return self._shapes.speed

    # --- what they are ------------------------------------------------------------------------------------

    def derivatives(self, index: int, time: arb, bits: int) -> tuple[arb, arb, arb, arb]:
        """Return balls of y, y', y'', y''' over a ball of times in the piece."""
        expansion = self._expansion(index, bits)
        start = self.kink(index)
        with working_precision(expansion.bits):
            return expansion.deviation(time - arb(start))

    def _expansion(self, index: int, bits: int) -> Expansion:
        key = (index, bits)
        if key not in self._expansions:
            if len(self._expansions) >= _KEPT:
                self._expansions.clear()
            self._expansions[key] = self._shapes.expansion(self._state(index, bits + _GUARD), bits + _GUARD)
        return self._expansions[key]

    def _state(self, index: int, bits: int) -> arb_mat:
        """Return (z, what is held) at the start of a piece."""
        early, states = self._from_start(bits)
        if index < len(early):
            return early[index]
        period, number = divmod(index - len(early), len(self._cycle.stretches))
        with working_precision(bits):
            return self._way(bits)[number] * states.at(period)

    def _way(self, bits: int) -> list[arb_mat]:
        """Return for each stretch (z at its start, what is held on it) as rows over the state at the sample."""
        if bits not in self._ways:
            self._ways[bits] = self._cycle.ways(bits)
        return self._ways[bits]

    def _from_start(self, bits: int) -> tuple[list[arb_mat], States]:
        """Return the states at the starts of the early pieces, and those at the samples from then on."""
        if bits not in self._starts:
            early, first = self._set_in_motion(bits)
            self._starts[bits] = early, States(self._cycle.enclosed(bits), first, bits)
        return self._starts[bits]

    def _set_in_motion(self, bits: int) -> tuple[list[arb_mat], arb_mat]:
        cycle, sets = self._cycle, dict(self._drive.starts)
        found: list[arb_mat] = []
        with working_precision(bits):
            state = arb_mat(cycle.order, 1)
            ends = [*(start for start, _, _ in self._early), self._first * cycle.period][1:]
            moving = arb_mat(cycle.moving, 1)
            for (start, _, number), end in zip(self._early, ends, strict=True):
                self._set(moving, sets.get(start))
                if (start / cycle.period).q == 1:
                    self._set(state, sets.get(start))
                found.append(_stacked(moving, arb_mat(cycle.stretches[number].held) * state))
                motion = arb_mat(cycle.motion_over(end - start, bits).tolist()[: cycle.moving])
                moving = motion * found[-1]
                if (end / cycle.period).q == 1:
                    state = _stacked(moving, arb_mat(cycle.settled_samples) * state)
            self._set(state, sets.get(self._first * cycle.period))
        return found, state

    def _set(self, state: arb_mat, setting: Setting | None) -> None:
        """Set the states of the drive, the last of those that move."""
        first = self._cycle.moving - self._drive.order
        for place, value in enumerate(setting or ()):
            if value is not None:
                state[first + place, 0] = arb(value)

    def flat(self, index: int) -> bool:
        """Whether the signal only holds what sampled blocks send."""
        return self._shapes.constant

    def calm(self, index: int, order: int, sign: int, level: fmpq, *, backward: bool = False) -> int:
        """Return how many pieces in a row stay below a level."""
        count = len(self._cycle.stretches)
        place = index - len(self._early)
        if place < 0 or order > 1:
            return 0
        number, offset = divmod(place, BLOCK * count)
        low, high = self._hulls[order].block(number)
        calm = (high if sign > 0 else -low) < _below(level)
        rest = calm[: offset + 1][::-1] if backward else calm[offset:]
        return len(rest) if rest.all() else int(rest.argmin())

    def likely(self, first: int, last: int, order: int, sign: int) -> int | None:
        """Return the piece whose hull is highest from below."""
        early, count = len(self._early), len(self._cycle.stretches) * BLOCK
        first, last = max(first, early), min(last, early + _LOOKED * count - 1)
        if order > 1 or first > last:
            return None
        best: tuple[float, int] | None = None
        for number in range((first - early) // count, (last - early) // count + 1):
            low, high = self._hulls[order].block(number)
            start = max(first - early - number * count, 0)
            part = (low if sign > 0 else -high)[start : last - early - number * count + 1]
            place = int(part.argmax())
            if best is None or part[place] > best[0]:
                best = float(part[place]), early + number * count + start + place
        return None if best is None else best[1]

    @cached_property
    def _hulls(self) -> tuple[Hulls, Hulls]:
        cycle, bits = self._cycle, _BOUND_BITS
        _, states = self._from_start(bits)
        lengths = [stretch.length for stretch in cycle.stretches]
        step = cycle.enclosed(bits)
        first, second = (Hulls(self._shapes, order, self._way(bits), lengths, step, states.at) for order in (0, 1))
        return first, second

    # --- what is known of them for good ---------------------------------------------------------------------

    def jump(self, index: int) -> fmpq | None:
        """Return by how much y jumps at a kink, where that is told exactly."""
        if index == 0:
            state = self._exact_start()
            held = self._cycle.stretches[0].held
            at = [sum((held[i, j] * one for j, one in enumerate(state)), fmpq(0)) for i in range(int(held.nrows()))]
            moving, direct = self._line
            return sum((c * z for c, z in zip(moving, state, strict=False)), fmpq(0)) + sum(
                (d * u for d, u in zip(direct, at, strict=True)), fmpq(0)
            )
        begin = self.kink(index)
        inside = begin - (begin / self._cycle.period).floor() * self._cycle.period
        arriving = [factor for factor, (_, part) in zip(self._line[1], self._cycle.lags, strict=True) if part == inside]
        sets = any(time == begin for time, _ in self._drive.starts)
        read = self._line[0][self._cycle.moving - self._drive.order :]
        moved = (sets and any(factor != 0 for factor in read)) or any(factor != 0 for factor in arriving)
        return None if moved else fmpq(0)

    def continuous_from(self) -> fmpq | None:
        """Return a time from which on y does not jump, where it reads nothing that is held."""
        if any(factor != 0 for factor in self._line[1]):
            return None
        read = self._line[0][self._cycle.moving - self._drive.order :]
        return self._drive.starts[-1][0] if any(factor != 0 for factor in read) else fmpq(0)

    def polynomial(self, index: int) -> fmpq_poly | None:
        """Return zero for a piece before anything has moved."""
        if not self._at_rest(index):
            return None
        modes = self._expansion(index, _BOUND_BITS).modes
        return fmpq_poly([0]) if all(c.is_zero() for mode in modes for c in mode.coefficients) else None

    def _exact_start(self) -> Row:
        state = [fmpq(0)] * self._cycle.order
        first = self._cycle.moving - self._drive.order
        for place, value in enumerate(self._drive.starts[0][1]):
            state[first + place] = fmpq(0) if value is None else value
        return state

    def settled_by(self, distance: fmpq) -> fmpq | None:
        """Return a time from which on |y - final| <= distance is proved; None: none found."""
        if isinstance(self._final, Absent) or self._decay is None:
            return None
        sample = self._decay.first_within(distance)
        return None if sample is None else (self._first + sample) * self._cycle.period

    def lasting(self) -> tuple[int, fmpq] | None:
        """Return the sign that y keeps about its rest, and since when; 0 where it is exactly at rest from then on."""
        return self._lasting

    @cached_property
    def _lasting(self) -> tuple[int, fmpq] | None:
        if self._dead_after is not None:
            return 0, (self._first + self._dead_after) * self._cycle.period
        if isinstance(self._final, Absent) or self._deviation is None:
            return None
        matrix, first, form, kept = self._deviation
        ways = [
            (_of_deviation(self._shapes, way, kept), stretch.length)
            for stretch, way in zip(self._cycle.stretches, self._way(_BOUND_BITS), strict=True)
        ]
        found = side(matrix, first, form, ways, _BOUND_BITS)
        return None if found is None else (found[0], (self._first + found[1]) * self._cycle.period)

    @cached_property
    def _dead_after(self) -> int | None:
        exact = self._cycle.exact
        if exact is None or isinstance(self._final, Absent) or self._first > 0:
            return None
        state = fmpq_mat(self._cycle.order, 1, self._exact_start())
        rest = fmpq_mat(self._cycle.order, 1, self._rest)
        for count in range(self._cycle.order + 1):
            if state == rest:
                return count
            state = exact * state
        return None

    def slow_by(self, rate: fmpq) -> fmpq | None:
        """Return a time from which on |y'| <= rate is proved; None: none found."""
        if isinstance(self._final, Absent) or self._slowing is None:
            return None
        sample = self._slowing.first_within(rate)
        return None if sample is None else (self._first + sample) * self._cycle.period

    @cached_property
    def _decay(self) -> Decay | None:
        if self._deviation is None:
            return None
        matrix, first, form, _ = self._deviation
        return Decay(States(matrix, first, _BOUND_BITS), form)

    @cached_property
    def _slowing(self) -> Decay | None:
        if self._deviation is None:
            return None
        matrix, first, _, kept = self._deviation
        return Decay(States(matrix, first, _BOUND_BITS), self._form(1, kept))

    def _form(self, order: int, kept: list[int]) -> arb_mat:
        """Return Q that bounds y^(order) - rest over a period by the deviation at its sample."""
        with working_precision(_BOUND_BITS):
            form = arb_mat(len(kept), len(kept))
            terms = derived(self._shapes.rows(_BOUND_BITS), order)
            for stretch, way in zip(self._cycle.stretches, self._way(_BOUND_BITS), strict=True):
                rows = [(pole, acb_mat(weights), stretch.length) for pole, weights in terms]
                form = form + quadratic(rows, _columns(way, kept))
        return form

    @cached_property
    def _deviation(self) -> tuple[arb_mat, arb_mat, arb_mat, list[int]] | None:
        """How the deviation from rest moves on at the samples, what it is at first, and the form that bounds y.

        The states of the drive are left out: those that are kept, by their places, come last.
        """
        cycle, bits = self._cycle, _BOUND_BITS
        drive = range(cycle.moving - self._drive.order, cycle.moving)
        kept = [j for j in range(cycle.order) if j not in drive]
        if not kept:
            return None
        _, states = self._from_start(bits)
        with working_precision(bits):
            whole = cycle.enclosed(bits).tolist()
            matrix = arb_mat([[whole[i][j] for j in kept] for i in kept])
            state = states.at(0)
            first = arb_mat(len(kept), 1, [state[j, 0] - arb(self._rest[j]) for j in kept])
        return matrix, first, self._form(0, kept), kept

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return how y leaves its rest: how long it moves one way from a kink on, and which way."""
        if not self._at_rest(index):
            return None
        return start(self._shapes, self._state(index, _BOUND_BITS), self.kink(index + 1) - self.kink(index))

    def _at_rest(self, index: int) -> bool:
        """Whether nothing but the drive and what is held has moved before a piece."""
        if index > self._cycle.order * len(self._cycle.stretches) + len(self._early):
            return False
        state = self._state(index, _BOUND_BITS)
        return all(state[j, 0].is_zero() for j in range(self._cycle.moving - self._drive.order))


def _of_deviation(shapes: Shapes, way: arb_mat, kept: list[int]) -> Callable[[arb_mat], Expansion]:
    with working_precision(_BOUND_BITS):
        through = _columns(way, kept)
    return lambda state: shapes.expansion(through * state, _BOUND_BITS)


def _columns(matrix: arb_mat, places: list[int]) -> arb_mat:
    return arb_mat([[row[j] for j in places] for row in matrix.tolist()])


def _stacked(above: arb_mat, below: arb_mat) -> arb_mat:
    columns = max(int(above.ncols()), int(below.ncols()))
    rows = [*above.tolist(), *below.tolist()]
    return arb_mat(len(rows), columns, [entry for row in rows for entry in row])


def _below(level: fmpq) -> float:
    """Return a float that is not above a level."""
    nearest = int(level.p) / int(level.q)
    return nearest - abs(nearest) * 2.0**-50
