"""Direct feed-through round a loop: where the signals are not determined, and where any delay would destabilise."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

from flint import fmpq, fmpq_mat, fmpz_poly

from specgate.systems.assignment import heaviest_assignment
from specgate.systems.blocks import SignalRef
from specgate.systems.equations import Equations, Reference
from specgate.systems.graph import is_cycle, strong_components
from specgate.terms.records import record


@record
class AlgebraicLoop:
    """Signals that their equations do not determine, and why (a sentence that names them)."""

    signals: tuple[str, ...]
    reason: str


@record
class DirectCycle:
    """Nodes that feed each other at infinite frequency. gains[i, j]: what node i takes over of node j at once."""

    nodes: tuple[Reference, ...]
    gains: fmpq_mat

    @property
    def signals(self) -> tuple[str, ...]:
        """The signals among the nodes; every cycle passes through one."""
        return signals_of(self.nodes)

    @property
    def determinant(self) -> fmpq:
        """det(I - gains): zero if and only if the nodes are not determined."""
        return _complement(self.gains).det()

    def loop_gains(self) -> Iterator[tuple[str, fmpq | None]]:
        """Yield each signal with L at infinite frequency of the loop opened there; None where it is infinite."""
        for index, node in enumerate(self.nodes):
            if isinstance(node, SignalRef):
                cut = fmpq_mat(self.gains)
                for row in range(len(self.nodes)):
                    cut[row, index] = fmpq(0)
                opened = _complement(cut).det()
                yield node.name, self.determinant / opened - 1 if opened != 0 else None


def undetermined(equations: Equations) -> AlgebraicLoop | None:
    """Return the first algebraic loop among sums and blocks that are all proper; None if there is none.

    With proper blocks det P loses degree if and only if the feed-through of some cycle is singular.
    """
    for component in equations.components:
        if all(is_proper(equations, node) for node in component):
            for cycle in direct_cycles(equations, component):
                if cycle.determinant == 0:
                    return AlgebraicLoop(cycle.signals, _not_determined(cycle.signals))
    return None


def differentiating_loop(equations: Equations, block: Sequence[int], determinant: fmpz_poly) -> AlgebraicLoop | None:
    """Return the algebraic loop of a component with improper blocks, None if it is well posed.

    block: the unknowns of the component. Its part of det P has the degree that the degrees of its blocks give it,
    unless the leading coefficients cancel: then some closed channel differentiates more often than the blocks on its
    way do, and the smallest change of a gain brings in a pole from infinity.
    """
    unknowns = [equations.unknowns[variable] for variable in block]
    if all(is_proper(equations, unknown) for unknown in unknowns):
        return None
    nodes = next(component for component in equations.components if unknowns[0] in component)
    if determinant and determinant.degree() == heaviest_assignment(_degrees(equations, nodes)):
        return None
    signals = signals_of(nodes)
    if not determinant:
        return AlgebraicLoop(signals, _not_determined(signals))
    return AlgebraicLoop(
        signals,
        f"algebraic loop: the loop of {_listed(signals)} is ill-posed, for its leading terms cancel at infinite "
        "frequency; closed, it differentiates more often than its blocks do",
    )


def is_proper(equations: Equations, node: Reference) -> bool:
    """Whether a node follows what it reads without differentiating it; sums and inputs do."""
    if isinstance(node, SignalRef):
        return True
    degree = equations.instances[node.instance].block.denominator.degree()
    return all(numerator.degree() <= degree for numerator, _ in equations.read_by(node))


def direct_cycles(equations: Equations, nodes: Iterable[Reference]) -> tuple[DirectCycle, ...]:
    """Return the cycles of direct feed-through among `nodes`."""
    members = dict.fromkeys(nodes)
    taken = {node: {n: g for n, g in _direct_gains(equations, node).items() if n in members} for node in members}
    arcs: dict[Reference, list[Reference]] = {node: [] for node in members}
    for node, gains in taken.items():
        for reference in gains:
            arcs[reference].append(node)
    return tuple(_cycle(component, taken) for component in strong_components(arcs) if is_cycle(component, arcs))


def signals_of(nodes: Iterable[Reference]) -> tuple[str, ...]:
    """Return the names of the signals among nodes."""
    return tuple(node.name for node in nodes if isinstance(node, SignalRef))


def _cycle(nodes: tuple[Reference, ...], taken: Mapping[Reference, Mapping[Reference, fmpq]]) -> DirectCycle:
    return DirectCycle(nodes, fmpq_mat([[taken[row].get(column, fmpq(0)) for column in nodes] for row in nodes]))


def _direct_gains(equations: Equations, node: Reference) -> Mapping[Reference, fmpq]:
    """Return what a signal or an output of a proper block takes over at once."""
    if isinstance(node, SignalRef):
        return equations.forms.get(node.name, {})
    gains: dict[Reference, fmpq] = {}
    denominator = equations.instances[node.instance].block.denominator
    for numerator, argument in equations.read_by(node):
        if numerator.degree() == denominator.degree():
            gain = numerator.leading_coefficient() / denominator.leading_coefficient()
            for reference, factor in argument.items():
                gains[reference] = gains.get(reference, fmpq(0)) + gain * factor
    return {reference: gain for reference, gain in gains.items() if gain != 0}


def _degrees(equations: Equations, nodes: Sequence[Reference]) -> list[dict[int, int]]:
    """Return the degrees of P, sums included, over the nodes of a component."""
    index = {node: i for i, node in enumerate(nodes)}
    rows: list[dict[int, int]] = []
    for node in nodes:
        row: dict[int, int] = {}
        for polynomial, combination in equations.terms(node):
            for reference in combination:
                if reference in index:
                    row[index[reference]] = max(polynomial.degree(), row.get(index[reference], 0))
        rows.append(row)
    return rows


def _complement(gains: fmpq_mat) -> fmpq_mat:
    size = gains.nrows()
    return fmpq_mat(size, size, [int(i % (size + 1) == 0) for i in range(size * size)]) - gains


def _not_determined(signals: Sequence[str]) -> str:
    if len(signals) == 1:
        return (
            f"algebraic loop: the equation of {signals[0]} passes it back to itself at once and does not determine it"
        )
    return f"algebraic loop: {_listed(signals)} act on each other at once, and their equations do not determine them"


def _listed(signals: Sequence[str]) -> str:
    return signals[0] if len(signals) == 1 else ", ".join(signals[:-1]) + " and " + signals[-1]
