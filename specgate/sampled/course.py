"""The course of a sampled response, at and between its samples: where its pieces are, and what each of them is."""

from __future__ import annotations

from bisect import bisect_right
from functools import cached_property

from flint import arb, arb_mat, fmpq

from specgate.response.answers import Absent
from specgate.response.modes import Expansion
from specgate.response.pieces import Pieces
from specgate.sampled.cycle import Cycle
from specgate.sampled.drive import Drive
from specgate.sampled.shapes import Shapes
from specgate.sampled.state_space import Row
from specgate.sampled.states import States
from specgate.sampled.swings import Swings
from specgate.terms.precision import working_precision

_GUARD = 96
_KEPT = 4096
MOST_EARLY = 1000
"""Sampling periods until an input is set for the last time that are gone through one by one."""


class SampledCourse(Pieces):
    """y = c z + d (what is held), z with the states of the drive last, from rest.

    final: the limit of y, or why there is none. rest: the state at the samples that the loop comes to, where it does.
    """

    def __init__(self, cycle: Cycle, line: tuple[Row, Row], drive: Drive, final: fmpq | Absent, rest: Row) -> None:
        self._cycle = cycle
        self._line = line
        self._drive = drive
        self._final = final
        self._rest = rest
        first = cycle.moving - drive.order
        self._swings = Swings(cycle.motion.a, line[0], [(first + place, bump) for place, bump in drive.bumps])
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

    def period(self) -> fmpq | None:
        """Return the period of a sine on an input."""
        return self._drive.period

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
        return max(self._shapes.speed, self._swings.speed(self.kink(index)))

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
            found = self._shapes.expansion(self._state(index, bits + _GUARD), bits + _GUARD)
            swings = tuple(self._swings.modes(self.kink(index), found.bits))
            self._expansions[key] = Expansion(found.offset, (*found.modes, *swings), found.bits)
        return self._expansions[key]

    def _state(self, index: int, bits: int) -> arb_mat:
        """Return (z, what is held) at the start of a piece, z less what the loop swings with an input."""
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
        cycle = self._cycle
        found: list[arb_mat] = []
        with working_precision(bits):
            state = arb_mat(cycle.order, 1)
            ends = [*(start for start, _, _ in self._early), self._first * cycle.period][1:]
            moving = arb_mat(cycle.moving, 1)
            for (start, _, number), end in zip(self._early, ends, strict=True):
                self._set(moving, start)
                if (start / cycle.period).q == 1:
                    self._set(state, start)
                    self._swings.sample(state, start)
                self._swings.level(moving, start)
                calm = moving - self._swings.moved(start, start, bits)
                found.append(_stacked(calm, arb_mat(cycle.stretches[number].held) * state))
                motion = arb_mat(cycle.motion_over(end - start, bits).tolist()[: cycle.moving])
                moving = motion * found[-1] + self._swings.moved(start, end, bits)
                if (end / cycle.period).q == 1:
                    state = _stacked(moving, arb_mat(cycle.settled_samples) * state)
            self._set(state, self._first * cycle.period)
        return found, state

    def _set(self, state: arb_mat, time: fmpq) -> None:
        """Set the states of the drive, the last of those that move; by an impulse the others jump."""
        first = self._cycle.moving - self._drive.order
        for place, value in enumerate(dict(self._drive.starts).get(time, ())):
            if value is not None:
                state[first + place, 0] = arb(value)
        for place, jump in enumerate(self._kick(time)):
            state[place, 0] = state[place, 0] + arb(jump)

    def _kick(self, time: fmpq) -> Row:
        """Return by how much the states that move jump by impulses: x' = A x + b a delta(t) leaves x at b a."""
        motion, first = self._cycle.motion.a, self._cycle.moving - self._drive.order
        kicks = [(first + place, area) for place, begin, area in self._drive.impulses if begin == time]
        return [sum((motion[i, j] * area for j, area in kicks), fmpq(0)) for i in range(first)] if kicks else []


def _stacked(above: arb_mat, below: arb_mat) -> arb_mat:
    columns = max(int(above.ncols()), int(below.ncols()))
    rows = [*above.tolist(), *below.tolist()]
    return arb_mat(len(rows), columns, [entry for row in rows for entry in row])
