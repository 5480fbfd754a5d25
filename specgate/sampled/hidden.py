"""Modes of a sampled loop that no channel shows: how many there are, decided from both sides.

A loop whose blocks have their modes in z alone is rational, and its hidden modes are those of its slow picture, which
then is exact (z = 1 + sT is a change of variable). Else: reached is what any input can move, between the samples A^i b
of every input, at them what its sample sets off, and all that follows from period to period. Seen is what any signal
shows at any time of a period: on every stretch the rows c A^i. The number of modes that are reached and seen is the
rank of (what sees) times (what reaches). Whole-number mixtures of both, multiplied out, give a matrix whose rank is at
most that; the pivots of its elimination in balls that are proved not to be zero bound it from below. From the other
side stand the hidden modes that are known exactly: modes in s that no input reaches or no signal shows, common factors
of a block in z, cancellations at z = 1. Where both agree the answer is exact, else it is open. An oscillation that the
samples cannot see is not hidden by that alone: between them signals show it.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from functools import cached_property

from flint import arb, arb_mat, fmpq, fmpq_mat

from specgate.response.answers import Answer
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.plant import Plant
from specgate.sampled.solution import SampledSolution
from specgate.sampled.state_space import Row, StateSpace, of_rows, realised
from specgate.systems.blocks import LinearForm, SignalRef
from specgate.systems.polynomials import order_at_origin
from specgate.terms.precision import working_precision

_BITS = 1024
_SAMPLE = StateSpace(fmpq_mat(1, 1), fmpq_mat(1, 1, [1]), fmpq_mat(1, 1, [1]), fmpq_mat(1, 1))
"""What stands for the sample of an input: a state that is set anew at every sample."""


def hidden_modes(solution: SampledSolution) -> Answer:
    """Return the number of hidden modes, with multiplicity."""
    if solution.wiring.late:
        return Answer.undecided("how many modes are hidden is not answered beside a dead time in a sampled loop")
    try:
        whole = _Whole(solution)
    except ValueError as reason:
        return Answer.undecided(str(reason))
    if whole.rational:
        return Answer.of_exact(sum(one.hidden.degree() for one in solution.slow.components))
    known, most = whole.known(), whole.order - whole.shown()
    if most == known:
        return Answer.of_exact(most)
    return Answer.undecided(f"between {known} and {most} modes are hidden: the highest precision does not tell")


class _Whole:
    """The whole loop, every mode of its blocks included, with a state for the sample of every input."""

    def __init__(self, solution: SampledSolution) -> None:
        self._solution = solution
        wiring = solution.wiring
        sampled = wiring.instances
        held = [one.held(output) for one in sampled for output in one.block.outputs]
        samplers = [one.arguments[name] for one in sampled for name in one.block.inputs]
        signals = [LinearForm(((fmpq(1), SignalRef(name)),)) for name in wiring.continuous.signals]
        names = [one.name for one in wiring.continuous.instances]
        self._counts = len(held), len(samplers), len(wiring.inputs)
        self._plant = Plant(wiring.continuous, names, [*held, *wiring.inputs]).seen([*samplers, *signals])
        self._blocks = [realised(one.block) for one in sampled]
        controllers = [Controller(system, one.block.delay) for system, one in zip(self._blocks, sampled, strict=True)]
        samples = [Controller(_SAMPLE, fmpq(0)) for _ in wiring.inputs]
        self._cycle = Cycle(self._motion, [*controllers, *samples], wiring.period)

    @property
    def rational(self) -> bool:
        """Whether no block in s has a mode."""
        return self._plant.order == 0

    @property
    def _motion(self) -> StateSpace:
        """From what is held, and from the samples of the inputs, to the samplers; an input's own sampler sees none."""
        held, samplers, inputs = self._counts
        plant = self._plant
        b = [[*row[:held], *([fmpq(0)] * inputs)] for row in plant.b.tolist()]
        c = [*plant.c.tolist()[:samplers], *([[fmpq(0)] * plant.order] * inputs)]
        d = [*plant.d.tolist()[:samplers], *([[fmpq(0)] * (held + inputs)] * inputs)]
        return StateSpace(plant.a, of_rows(b, held + inputs), of_rows(c, plant.order), of_rows(d, held + inputs))

    @cached_property
    def _samples(self) -> list[int]:
        """The places of the states that stand for the samples of the inputs."""
        end = self._cycle.moving + self._cycle.law.order
        return list(range(end - self._counts[2], end))

    @cached_property
    def _own(self) -> list[int]:
        return [j for j in range(self._cycle.order) if j not in self._samples]

    @property
    def order(self) -> int:
        """How many modes there are."""
        return len(self._own)

    def known(self) -> int:
        """Return how many hidden modes follow from exact arguments."""
        least = self._plant.reduced()
        at_one = order_at_origin(self._plant.a.charpoly()) - order_at_origin(least.a.charpoly())
        cancelled = sum(order_at_origin(one.hidden) for one in self._solution.slow.components)
        own = sum(block.order - block.reduced().order for block in self._blocks)
        return self._plant.order - least.order + own + max(cancelled - at_one, 0)

    def shown(self) -> int:
        """Return how many modes are proved to be reached and seen."""
        size = self.order
        with working_precision(_BITS):
            period = self._cycle.enclosed(_BITS)
            own = arb_mat([[period[i, j] for j in self._own] for i in self._own])
            reach = _krylov(own, self._moved(period))
            seen = _krylov(own.transpose(), self._seeing()).transpose()
            return _rank(_mixed(seen.transpose(), size).transpose() * _mixed(reach, size))

    def _moved(self, period: arb_mat) -> arb_mat:
        """Return what inputs move within a period, as columns over the own states."""
        held, _, inputs = self._counts
        between = _columns(self._plant.b, held, inputs)
        columns = [[period[i, j] for i in self._own] for j in self._samples]
        rest = [arb(0)] * (self.order - self._plant.order)
        for _ in range(self._plant.order):
            columns += [[*(arb(entry) for entry in column), *rest] for column in _listed(between)]
            between = self._plant.a * between
        return arb_mat(columns).transpose() if columns else arb_mat(self.order, 1)

    def _seeing(self) -> arb_mat:
        """Return what signals show within a period, as columns over the own states."""
        plant, cycle = self._plant, self._cycle
        held, samplers, inputs = self._counts
        signals = [
            [*own, *direct[:held], *([fmpq(0)] * inputs)]
            for own, direct in zip(plant.c.tolist()[samplers:], plant.d.tolist()[samplers:], strict=True)
        ]
        joined = _with_held(cycle.motion)
        rows, power = [], of_rows(signals, plant.order + held + inputs)
        for _ in range(plant.order + 1):
            rows += power.tolist()
            power = power * joined
        found: list[list[arb]] = []
        for way in cycle.ways(_BITS):
            whole = arb_mat(of_rows(rows)) * way if rows else arb_mat(1, cycle.order)
            found += [[row[j] for j in self._own] for row in whole.tolist()]
        return arb_mat(found).transpose()


def _with_held(motion: StateSpace) -> fmpq_mat:
    held = int(motion.b.ncols())
    rows = [[*own, *forced] for own, forced in zip(motion.a.tolist(), motion.b.tolist(), strict=True)]
    return of_rows([*rows, *([[fmpq(0)] * (motion.order + held)] * held)], motion.order + held)


def _columns(matrix: fmpq_mat, first: int, count: int) -> fmpq_mat:
    return of_rows([row[first : first + count] for row in matrix.tolist()], count)


def _listed(matrix: fmpq_mat) -> list[Row]:
    return [list(row) for row in matrix.transpose().tolist()]


def _krylov(matrix: arb_mat, first: arb_mat) -> arb_mat:
    """Return [F, M F, M^2 F, ...] as one matrix."""
    parts, power = [first.transpose()], first
    for _ in range(int(matrix.nrows()) - 1):
        power = matrix * power
        parts.append(power.transpose())
    return arb_mat([row for part in parts for row in part.tolist()]).transpose()


def _mixed(matrix: arb_mat, count: int) -> arb_mat:
    """Return `count` whole-number mixtures of the columns, always the same ones."""
    numbers = _digits()
    factors = arb_mat(int(matrix.ncols()), count, [next(numbers) for _ in range(int(matrix.ncols()) * count)])
    return matrix * factors


def _digits() -> Iterator[int]:
    """Yield whole numbers without a pattern that a matrix would share (a linear congruence)."""
    state = 1
    while True:
        state = state * 6364136223846793005 % (1 << 64) + 1442695040888963407
        yield (state >> 40) % 199 - 99


def _rank(matrix: arb_mat) -> int:
    """Return how many pivots of an elimination are proved not to be zero: a lower bound of the rank."""
    rows: list[list[arb]] = [list(row) for row in matrix.tolist()]
    count = 0
    while rows:
        i, j = max(((i, j) for i in range(len(rows)) for j in range(len(rows[0]))), key=lambda at: _size(rows, at))
        if rows[i][j].contains(0):
            return count
        count += 1
        pivot = rows.pop(i)
        rows = [
            [
                entry - row[j] / pivot[j] * other
                for k, (entry, other) in enumerate(zip(row, pivot, strict=True))
                if k != j
            ]
            for row in rows
        ]
        if rows and not rows[0]:
            return count
    return count


def _size(rows: Sequence[Sequence[arb]], at: tuple[int, int]) -> float:
    entry = rows[at[0]][at[1]]
    return -1.0 if entry.contains(0) else float(entry.abs_lower().log())
