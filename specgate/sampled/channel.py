"""From an input of a sampled loop to a combination of its signals: what is on the way, and the response in pieces."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from flint import fmpq, fmpq_mat

from specgate.response.answers import Absent
from specgate.response.inputs import Input
from specgate.sampled.components import UNTOLD, Component
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.drive import Drive
from specgate.sampled.pieces import SampledPieces
from specgate.sampled.plant import Plant
from specgate.sampled.solution import SampledSolution
from specgate.sampled.state_space import Row, StateSpace, diagonal, of_rows, realised
from specgate.sampled.steady import steady_state
from specgate.systems.blocks import LinearForm, OutputRef, SignalRef
from specgate.systems.polynomials import order_at_origin
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record

UNSETTLED = "the response does not settle"


@record
class SampledChannel:
    """From loop inputs to a linear form of signals and inputs.

    components: those on a path. instances: names of the blocks on a path.
    """

    solution: SampledSolution
    sources: tuple[str, ...]
    target: LinearForm
    components: tuple[Component, ...]
    instances: tuple[str, ...]

    @property
    def stable(self) -> bool | None:
        """Whether every mode on the way decays; None where that is not told."""
        found = [one.stable for one in self.components]
        return False if False in found else None if None in found else True

    @property
    def sampled(self) -> bool:
        """Whether a sampled block is on the way."""
        return any(one.name in self.instances for one in self.solution.wiring.instances)

    def continuous(self, source: str) -> TransferFunction:
        """Return the transfer function from a source of a channel without a sampled block on the way."""
        return self.solution.continuous.network.total(self.target, SignalRef(source))

    def slow(self, source: str) -> TransferFunction:
        """Return what the channel from a source is to slow signals, reduced."""
        return self.solution.slow.network.total(self.target, SignalRef(source))

    @property
    def hides_instability(self) -> bool:
        """Whether a mode on the way does not decay and does not show; of a channel from one source.

        The ways in which that happens are exact: modes in s that the samples do not meet, oscillations that they cannot
        see, poles and zeros that cancel at z = 1 (s = 0), and what cancels between the blocks in s alone.
        """
        if any(one.unshown for one in self.components):
            return True
        names = [one.instances for one in self.components]
        slow = [one.modes for one in self.solution.slow.components if one.instances in names]
        return sum(map(order_at_origin, slow)) > order_at_origin(self.slow(self.sources[0]).denominator)


def channel(solution: SampledSolution, sources: Sequence[str], target: LinearForm) -> SampledChannel:
    """Return a channel. Raises KeyError for an unknown name."""
    network = solution.slow.network
    after = network.downstream([SignalRef(source) for source in sources])
    before = network.upstream([node for _, node in target.terms])
    groups = zip(network.groups, solution.components, strict=True)
    on_path = tuple(part for group, part in groups if any(o in after and o in before for o in group.outputs))
    outputs = {node for node in after & before if isinstance(node, OutputRef)}
    names = tuple(one.name for one in solution.slow.wiring.instances if any(o.instance == one.name for o in outputs))
    return SampledChannel(solution, tuple(sources), target, on_path, names)


def pieces(found: SampledChannel, drive: Drive) -> SampledPieces:
    """Return the response to a drive of its sources. Raises ValueError for an improper block on the way."""
    wiring = found.solution.wiring
    sampled = [one for one in wiring.instances if one.name in found.instances]
    held = [one.held(output) for one in sampled for output in one.block.outputs]
    later = wiring.later(held)
    sent = [*held, *(name for name, _, _ in later)]
    taps = [(number, more) for _, number, more in later]
    plant = Plant(wiring.punctual.wiring, wiring.members(found.instances), [*sent, *drive.sources])
    samplers = [one.arguments[name] for one in sampled for name in one.block.inputs]
    least = plant.seen([*samplers, found.target]).reduced()
    controllers = [Controller(realised(one.block), one.block.delay) for one in sampled]
    alone = Cycle(_from_held(least, len(sent), len(samplers)), controllers, wiring.period, taps)
    driven = _driven(least, len(sent), drive)
    cycle = Cycle(_from_held(driven, len(sent), len(samplers)), controllers, wiring.period, taps)
    line = (list(driven.c.tolist()[-1]), list(driven.d.tolist()[-1])[: len(sent)])
    final, rest = _rest(found, least, alone, drive, line)
    return SampledPieces(cycle, line, drive, final, rest)


def delayed(solution: SampledSolution, driven: Sequence[tuple[str, Input]]) -> tuple[tuple[str, Input], ...]:
    """Return what is driven, and the same later wherever a dead time makes a block see it so."""
    late = solution.wiring.punctual.late
    more = [
        (name, replace(given, begin=given.begin + later))
        for name, (source, later) in late.items()
        for own, given in driven
        if own == source
    ]
    return (*driven, *more)


def _from_held(system: StateSpace, held: int, samplers: int) -> StateSpace:
    """Return the part of a system from what is held to the samplers."""
    return StateSpace(
        system.a,
        _columns(system.b, 0, held),
        of_rows(system.c.tolist()[:samplers], system.order),
        _columns(of_rows(system.d.tolist()[:samplers], int(system.d.ncols())), 0, held),
    )


def _columns(matrix: fmpq_mat, first: int, count: int) -> fmpq_mat:
    return of_rows([row[first : first + count] for row in matrix.tolist()], count)


def _driven(system: StateSpace, held: int, drive: Drive) -> StateSpace:
    """Return a system with its last inputs taken from a drive, whose states come last."""
    count = len(drive.sources)
    reads = of_rows(drive.reads, drive.order)
    fed, seen = _columns(system.b, held, count) * reads, _columns(system.d, held, count) * reads
    a = diagonal([system.a, drive.motion])
    for i, row in enumerate(fed.tolist()):
        for j, factor in enumerate(row):
            a[i, system.order + j] = factor
    b = of_rows([*_columns(system.b, 0, held).tolist(), *([[fmpq(0)] * held] * drive.order)], held)
    c = [[*row, *more] for row, more in zip(system.c.tolist(), seen.tolist(), strict=True)]
    return StateSpace(a, b, of_rows(c), _columns(system.d, 0, held))


def _rest(
    found: SampledChannel, least: StateSpace, alone: Cycle, drive: Drive, line: tuple[Row, Row]
) -> tuple[fmpq | Absent, Row]:
    """Return the final value and the state at rest: of a loop that settles, under a drive that ends constant."""
    if found.stable is None:
        return Absent(UNTOLD, proved=False), []
    if not found.stable:
        return Absent(UNSETTLED), []
    if drive.rest is None:
        return Absent("where the input does not tend to a constant, a sampled loop is not searched", proved=False), []
    held, samplers = int(alone.motion.b.ncols()), int(alone.motion.c.nrows())
    given = fmpq_mat(len(drive.rest), 1, list(drive.rest))
    fed = _columns(least.b, held, len(drive.rest)) * given
    direct = [list(row) for row in (_columns(least.d, held, len(drive.rest)) * given).tolist()]
    try:
        moving, own, kept = steady_state(alone, fed, of_rows(direct[:samplers], 1))
    except ZeroDivisionError:
        return Absent("a dead time leaves the steady state open", proved=False), []
    spread = [kept[output] for output in alone.outputs]
    final = _dot(line[0][: len(moving)], moving) + _dot(line[1], spread) + direct[-1][0]
    return final, [*moving, *drive.last, *own, *alone.memory(kept)]


def _dot(one: Sequence[fmpq], other: Sequence[fmpq]) -> fmpq:
    return sum((a * b for a, b in zip(one, other, strict=True)), fmpq(0))
