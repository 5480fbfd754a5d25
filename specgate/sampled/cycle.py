"""One period of a sampled loop: what happens at the sample, what is held then, and how the rest moves on in between.

The state is (z, q, m): z of the continuous part just at kT, q of the controllers, m what they sent out before and has
not arrived yet. At kT every sampler sees the value that its signal has from kT on, jumps at kT included; the
controllers answer at once, and an output with the delay d = n T + e arrives at (k + n) T + e. What is done at the
sample is rational and kept as exact rows over the state. Only the motion in between needs exponentials, and they too
are rational where the continuous part is made of integrators alone.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from math import factorial
from typing import TypeVar

from flint import arb, arb_mat, fmpq, fmpq_mat, fmpq_poly

from specgate.sampled.state_space import StateSpace, diagonal, identity, of_rows
from specgate.terms.precision import working_precision
from specgate.terms.records import record

Matrix = TypeVar("Matrix", fmpq_mat, arb_mat)

_GUARD = 64


@record
class Controller:
    """A sampled block as a state space in z, with its delay (s)."""

    system: StateSpace
    delay: fmpq


@record
class Stretch:
    """A part of the period on which nothing jumps: [start, start + length), and what is held there.

    held: the held outputs as rows over the state at the sample.
    """

    start: fmpq
    length: fmpq
    held: fmpq_mat


class Cycle:
    """One period of `motion` (from all held outputs to all samplers' inputs) with its controllers.

    The inputs of the controllers are the outputs of `motion`, in order; their outputs are its first inputs. later: its
    further inputs, each an output (by its number) that arrives so much later. Raises ValueError where the samples do
    not determine each other (an algebraic loop at the sample).
    """

    def __init__(
        self,
        motion: StateSpace,
        controllers: Sequence[Controller],
        period: fmpq,
        later: Sequence[tuple[int, fmpq]] = (),
    ) -> None:
        self.motion = motion
        self.period = period
        delays = [one.delay for one in controllers for _ in range(int(one.system.d.nrows()))]
        self.law = StateSpace(*(diagonal(part) for part in zip(*map(_parts, controllers), strict=True)))
        self.outputs = [*range(len(delays)), *(output for output, _ in later)]
        """For each input of the motion, the output that it holds."""
        self.lags = [
            _lag(delays[output] + more, period)
            for output, more in (*((j, fmpq(0)) for j in range(len(delays))), *later)
        ]

    # --- layout of the state ------------------------------------------------------------------------------

    @cached_property
    def moving(self) -> int:
        """How many states move on between samples; they come first."""
        return self.motion.order

    @cached_property
    def order(self) -> int:
        """How many states there are."""
        return self.moving + self.law.order + sum(self._registers)

    @cached_property
    def counts(self) -> list[int]:
        """For each input of the motion, by how many samples a sampler sees it late."""
        return [whole + (part > 0) for whole, part in self.lags]

    @cached_property
    def _registers(self) -> list[int]:
        """For each output, how many earlier answers are kept."""
        count = int(self.law.d.nrows())
        return [max(c for c, own in zip(self.counts, self.outputs, strict=True) if own == j) for j in range(count)]

    @property
    def spread(self) -> fmpq_mat:
        """What the inputs of the motion are in a steady state, as rows over the outputs."""
        count = int(self.law.d.nrows())
        return of_rows([[fmpq(int(own == j)) for j in range(count)] for own in self.outputs], count)

    def memory(self, kept: Sequence[fmpq]) -> list[fmpq]:
        """Return what is kept of earlier answers in a steady state."""
        return [value for value, count in zip(kept, self._registers, strict=True) for _ in range(count)]

    def _register(self, output: int, age: int) -> int:
        """Return the place of what an output sent out `age` samples ago, 1 or more."""
        return self.moving + self.law.order + sum(self._registers[:output]) + age - 1

    # --- at the sample ------------------------------------------------------------------------------------

    @cached_property
    def sent(self) -> fmpq_mat:
        """What the controllers answer, as rows over the state."""
        law, motion = self.law, self.motion
        size = int(law.d.nrows())
        at_once = of_rows(
            [
                [fmpq(int(count == 0 and own == j)) for j in range(size)]
                for count, own in zip(self.counts, self.outputs, strict=True)
            ],
            size,
        )
        around = identity(size) - law.d * motion.d * at_once
        if around.nrows() and around.det() == 0:
            raise ValueError("the samples act on each other at once and do not determine each other")
        given = law.d * self._samples_of(self._arrived()) + self._placed(law.c, self.moving)
        return around.inv() * given if around.nrows() else given

    def _arrived(self) -> fmpq_mat:
        """What is held just at the sample of earlier answers; zero where an answer is held at once."""
        rows = [
            self._unit(self._register(own, count)) if count else self._zero()
            for own, count in zip(self.outputs, self.counts, strict=True)
        ]
        return of_rows(rows, self.order)

    def _samples_of(self, held: fmpq_mat) -> fmpq_mat:
        return self._placed(self.motion.c, 0) + self.motion.d * held

    @cached_property
    def samples(self) -> fmpq_mat:
        """What the samplers see, as rows over the state."""
        return self._samples_of(self.stretches[0].held)

    @cached_property
    def stretches(self) -> tuple[Stretch, ...]:
        """The parts of the period, in order."""
        starts = sorted({fmpq(0), *(part for _, part in self.lags)})
        ends = [*starts[1:], self.period]
        return tuple(
            Stretch(start, end - start, of_rows([self._held(j, start) for j in range(len(self.lags))], self.order))
            for start, end in zip(starts, ends, strict=True)
        )

    def _held(self, source: int, since: fmpq) -> list[fmpq]:
        """Return what an input of the motion holds from a time in the period on."""
        whole, part = self.lags[source]
        age, output = whole + (since < part), self.outputs[source]
        return self._unit(self._register(output, age)) if age else list(self.sent.tolist()[output])

    @cached_property
    def settled_samples(self) -> fmpq_mat:
        """What controllers and memory are at the next sample, as rows over the state: all but the moving states."""
        law = self._placed(self.law.a, self.moving) + self.law.b * self.samples
        memory = [
            self._unit(self._register(j, age - 1)) if age > 1 else list(self.sent.tolist()[j])
            for j, count in enumerate(self._registers)
            for age in range(1, count + 1)
        ]
        return of_rows([*map(list, law.tolist()), *memory], self.order)

    def _unit(self, place: int) -> list[fmpq]:
        return [fmpq(int(j == place)) for j in range(self.order)]

    def _zero(self) -> list[fmpq]:
        return [fmpq(0)] * self.order

    def _placed(self, matrix: fmpq_mat, left: int) -> fmpq_mat:
        """Return a matrix over some of the states as one over all."""
        right = self.order - left - int(matrix.ncols())
        rows = [[*([fmpq(0)] * left), *row, *([fmpq(0)] * right)] for row in matrix.tolist()]
        return of_rows(rows, self.order)

    # --- in between ---------------------------------------------------------------------------------------

    @cached_property
    def exact(self) -> fmpq_mat | None:
        """The state at the next sample as exact rows over the state; None where it takes exponentials."""
        if self.motion.a.charpoly() != fmpq_poly([0, 1]) ** self.moving:
            return None
        moved = self._placed(identity(self.moving), 0)
        for stretch in self.stretches:
            joined = _joined(self.motion)
            powers = [identity(int(joined.nrows()))]
            for _ in range(self.moving + 1):
                powers.append(powers[-1] * joined * stretch.length)
            motion = powers[0]
            for count, power in enumerate(powers[1:], 1):
                motion += power / fmpq(factorial(count))
            moved = _moved(motion, self.moving, moved, stretch.held)
        return of_rows([*moved.tolist(), *self.settled_samples.tolist()], self.order)

    def enclosed(self, bits: int) -> arb_mat:
        """Return the state at the next sample as rows of balls over the state."""
        if self.exact is not None:
            with working_precision(bits + _GUARD):
                return arb_mat(self.exact)
        with working_precision(bits + _GUARD):
            moved = arb_mat(self._placed(identity(self.moving), 0))
            for stretch in self.stretches:
                motion = self.motion_over(stretch.length, bits)
                moved = _moved(motion, self.moving, moved, arb_mat(stretch.held))
            return arb_mat([*moved.tolist(), *arb_mat(self.settled_samples).tolist()])

    def ways(self, bits: int) -> list[arb_mat]:
        """Return for each stretch (moving states at its start, what is held on it) as rows over the state."""
        found = []
        with working_precision(bits + _GUARD):
            moving = arb_mat(self._placed(identity(self.moving), 0))
            for stretch in self.stretches:
                whole = [*moving.tolist(), *arb_mat(stretch.held).tolist()]
                found.append(arb_mat(len(whole), self.order, [entry for row in whole for entry in row]))
                motion = self.motion_over(stretch.length, bits).tolist()[: self.moving]
                moving = arb_mat(self.moving, len(whole), [entry for row in motion for entry in row]) * found[-1]
        return found

    def motion_over(self, length: fmpq | arb, bits: int) -> arb_mat:
        """Return e^(M length) of the moving states together with what is held, which stays as it is."""
        if isinstance(length, arb):
            with working_precision(bits + _GUARD):
                return (arb_mat(self._joined) * length).exp()
        key = (int(length.p), int(length.q), bits)
        if key not in self._motions:
            with working_precision(bits + _GUARD):
                self._motions[key] = arb_mat(self._joined * length).exp()
        return self._motions[key]

    @cached_property
    def _joined(self) -> fmpq_mat:
        return _joined(self.motion)

    @cached_property
    def _motions(self) -> dict[tuple[int, int, int], arb_mat]:
        """The motions over the lengths that were asked for, by length and precision."""
        return {}


def _moved(motion: Matrix, moving: int, states: Matrix, held: Matrix) -> Matrix:
    kind = type(motion)
    rows = [list(row) for row in motion.tolist()[:moving]]
    size = int(motion.nrows())
    own = kind(moving, moving, [entry for row in rows for entry in row[:moving]])
    forced = kind(moving, size - moving, [entry for row in rows for entry in row[moving:]])
    return own * states + forced * held


def _joined(motion: StateSpace) -> fmpq_mat:
    """Return [[A, B], [0, 0]]."""
    order, held = motion.order, int(motion.b.ncols())
    rows = [[*own, *forced] for own, forced in zip(motion.a.tolist(), motion.b.tolist(), strict=True)]
    return of_rows([*rows, *([[fmpq(0)] * (order + held)] * held)], order + held)


def _lag(delay: fmpq, period: fmpq) -> tuple[int, fmpq]:
    """Return a delay as whole periods and a rest below one."""
    whole = int((delay / period).floor())
    return whole, delay - whole * period


def _parts(controller: Controller) -> tuple[fmpq_mat, fmpq_mat, fmpq_mat, fmpq_mat]:
    system = controller.system
    return system.a, system.b, system.c, system.d
