"""The response of a sampled loop as smooth pieces: what is known of them all at once, and for good."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property

from flint import acb_mat, arb, arb_mat, fmpq, fmpq_mat, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.modes import Expansion
from specgate.response.superposed.integrals import integral, square_integral
from specgate.sampled import areas
from specgate.sampled.areas import all_time, one_sided
from specgate.sampled.course import MOST_EARLY, SampledCourse
from specgate.sampled.decay import Decay, quadratic
from specgate.sampled.hulls import BLOCK, Hulls, derived
from specgate.sampled.lasting import side
from specgate.sampled.shapes import Shapes
from specgate.sampled.starting import start
from specgate.sampled.state_space import Row
from specgate.sampled.states import States
from specgate.terms.precision import working_precision

_LOOKED = 512
"""Blocks of samples that are looked through for a likely summit."""
_BOUND_BITS = 256


class SampledPieces(SampledCourse):
    """The same with all that is known of its pieces for good, for searches to be short and answers exact."""

    @property
    def undefined(self) -> Absent | None:
        """Why there is no such response, or why it is not searched."""
        if self._first > MOST_EARLY:
            reason = f"an input that begins or ends more than {MOST_EARLY} sampling periods late is not searched"
            return Absent(reason, proved=False)
        first = self._cycle.moving - self._drive.order
        seen = self._cycle.motion.c.tolist()
        for place, _, _ in self._drive.impulses:
            if any(row[first + place] != 0 for row in seen):
                return Absent("an impulse reaches a sampler directly, and a sample of it means nothing")
            if self._line[0][first + place] != 0:
                return Absent("an impulse passes straight through to the signal")
        return None

    # --- many pieces at once ----------------------------------------------------------------------------------

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
        setting = next((states for time, states in self._drive.starts if time == begin), ())
        swinging = [place for place, _ in self._drive.bumps]
        # one minus a cosine begins and ends at zero
        sets = [place for place, value in enumerate(setting) if value is not None and place not in swinging]
        read = self._line[0][self._cycle.moving - self._drive.order :]
        kicked = sum((c * z for c, z in zip(self._line[0], self._kick(begin), strict=False)), fmpq(0))
        moved = kicked != 0 or any(read[place] != 0 for place in sets) or any(factor != 0 for factor in arriving)
        return None if moved else fmpq(0)

    def continuous_from(self) -> fmpq | None:
        """Return a time from which on y does not jump, where it reads nothing that is held."""
        if any(factor != 0 for factor in self._line[1]):
            return None
        read = self._line[0][self._cycle.moving - self._drive.order :]
        jumps = any(factor != 0 for factor in read) or bool(self._drive.impulses)
        return self._drive.starts[-1][0] if jumps else fmpq(0)

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
        for place, jump in enumerate(self._kick(fmpq(0))):
            state[place] = jump
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

    # --- integrals, of a response that tends to zero ----------------------------------------------------------

    def area(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y over a part of a piece."""
        begin = self.kink(index)
        return integral(self._expansion(index, bits), fmpq_poly(), left - begin, right - begin)

    def square(self, index: int, left: fmpq, right: fmpq, bits: int) -> arb | None:
        """Return a ball of the integral of y^2 over a part of a piece."""
        begin = self.kink(index)
        return square_integral(self._expansion(index, bits), fmpq_poly(), left - begin, right - begin)

    def rest(self, time: fmpq) -> tuple[fmpq, fmpq] | None:
        """Return bounds of the integrals of |y| and of y^2 from a time on."""
        sample = int((time / self._cycle.period).floor()) - self._first
        if self._final != 0 or self._decay is None or sample < 0:
            return None
        return self._decay.integrals(sample, self._cycle.period)

    def closing_square(self, bits: int) -> tuple[fmpq, arb] | None:
        """Return the first sample after the drive is set last, and the integral of y^2 from there on."""
        if self._final != 0 or self._deviation is None:
            return None
        precision = 4 * bits + _BOUND_BITS
        matrix, first, kept = self._deviation_at(precision)
        total = all_time(matrix, first, areas.quadratic(self._spans(kept, precision), precision), precision)
        return None if total is None else (self._first * self._cycle.period, total)

    def closing(self, bits: int) -> tuple[fmpq, arb] | None:
        """Return a time from which on y keeps its sign, and the integral of |y| from there on."""
        lasting = self.lasting()
        if self._final != 0 or lasting is None or lasting[0] == 0:
            return None
        precision = 2 * bits + _BOUND_BITS
        matrix, first, kept = self._deviation_at(precision)
        sample = int((lasting[1] / self._cycle.period).ceil()) - self._first
        state = States(matrix, first, precision).far(sample)
        total = one_sided(matrix, state, areas.linear(self._spans(kept, precision), precision), precision)
        return lasting[1], lasting[0] * total

    def _spans(self, kept: list[int], bits: int) -> list[areas.Stretch]:
        ways = zip(self._cycle.stretches, self._way(bits), strict=True)
        return [(self._shapes.rows(bits), _columns(way, kept), stretch.length) for stretch, way in ways]

    # --- how it decays ----------------------------------------------------------------------------------------

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
        if self._cycle.order == self._drive.order:
            return None
        matrix, first, kept = self._deviation_at(_BOUND_BITS)
        return matrix, first, self._form(0, kept), kept

    def _deviation_at(self, bits: int) -> tuple[arb_mat, arb_mat, list[int]]:
        cycle = self._cycle
        drive = range(cycle.moving - self._drive.order, cycle.moving)
        kept = [j for j in range(cycle.order) if j not in drive]
        _, states = self._from_start(bits)
        with working_precision(bits):
            whole = cycle.enclosed(bits).tolist()
            matrix = arb_mat([[whole[i][j] for j in kept] for i in kept])
            state = states.at(0)
            first = arb_mat(len(kept), 1, [state[j, 0] - arb(self._rest[j]) for j in kept])
        return matrix, first, kept

    def start(self, index: int) -> tuple[fmpq, int] | None:
        """Return how y leaves its rest: how long it moves one way from a kink on, and which way."""
        if not self._at_rest(index) or self._swings.acting(self.kink(index)):
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


def _below(level: fmpq) -> float:
    """Return a float that is not above a level."""
    nearest = int(level.p) / int(level.q)
    return nearest - abs(nearest) * 2.0**-50
