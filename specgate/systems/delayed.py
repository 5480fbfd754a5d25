"""A wiring with dead times solved: every mode, algebraic loops, channels with their hidden modes, opened loops.

It is to `solution` what quasi-polynomials are to polynomials. The loops are well posed if the rational rest is, with
every dead time cut: what comes late does not act at once.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cached_property
from itertools import combinations

from flint import fmpq, fmpq_mpoly, fmpq_poly

from specgate.systems.blocks import SignalRef, Wiring
from specgate.systems.delay_cut import has_dead_time
from specgate.systems.delayed_network import DelayedGroup, DelayedNetwork, DelayedTransfer
from specgate.systems.feedthrough import AlgebraicLoop
from specgate.systems.opening import INJECTED, Cut, cut_at, held_open
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_stability import is_stable
from specgate.systems.solution import LoopSolution, StrongFeedThrough, carriers, solve
from specgate.terms.records import record


@record
class DelayedComponent:
    """Applied blocks that act on each other, with the modes they have together; see `solution.Component`."""

    signals: tuple[str, ...]
    instances: tuple[str, ...]
    modes: Quasi
    hidden: Quasi

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode decays; None where that was not decided."""
        return is_stable(self.modes)


@record
class DelayedChannel:
    """From a loop input to a signal; see `solution.Channel`. transfer: reduced; hidden: in modes and not in it."""

    source: str
    target: str
    transfer: DelayedTransfer
    modes: Quasi
    hidden: Quasi
    components: tuple[DelayedComponent, ...]
    unstable_not_leading: tuple[DelayedComponent, ...]
    unstable_not_reached: tuple[DelayedComponent, ...]

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode on the way decays, shown or hidden; None where that was not decided."""
        return is_stable(self.modes)

    @cached_property
    def hides_instability(self) -> bool | None:
        """Whether a hidden mode on the way does not decay; None where that was not decided."""
        stable = is_stable(self.hidden)
        return None if stable is None else not stable


@record
class DelayedOpenLoop:
    """The loop opened for all users of a signal; see `opening.OpenLoop`.

    transfer: L, not reduced: the denominator has every mode of the opened component. reduced: the same without common
    factors.
    """

    signal: str
    transfer: DelayedTransfer
    reduced: DelayedTransfer
    closed: Quasi
    algebraic_loop: AlgebraicLoop | None = None

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode of the closed component decays; None where that was not decided."""
        return is_stable(self.closed)


@record
class DelayedSolution:
    """A wiring with dead times and what follows from it.

    rest: its rational rest, all dead times cut. algebraic_loop: signals that are not determined; where it is set,
    everything else raises ValueError.
    """

    wiring: Wiring
    rest: LoopSolution
    algebraic_loop: AlgebraicLoop | None
    _network: DelayedNetwork

    @property
    def network(self) -> DelayedNetwork:
        """The solved equations."""
        if self.algebraic_loop is not None:
            raise ValueError(self.algebraic_loop.reason)
        return self._network

    @cached_property
    def determinant(self) -> Quasi:
        """The characteristic quasi-polynomial: every mode with its multiplicity, cancelled or not."""
        return self._scaled(self._all_modes)

    @cached_property
    def factors(self) -> tuple[tuple[Quasi, int], ...]:
        """The factors of the determinant, as in `DelayedTransfer`."""
        network = self.network
        return network.transfer((network.ring.one, self._all_modes)).factors

    @cached_property
    def _all_modes(self) -> fmpq_mpoly:
        return self._product(self.network.groups)

    def _product(self, groups: Sequence[DelayedGroup]) -> fmpq_mpoly:
        total = self.network.ring.one
        for group in groups:
            total = total * group.modes
        return total

    def _scaled(self, element: fmpq_mpoly) -> Quasi:
        quasi = self.network.ring.quasi(element)
        return quasi.scaled(fmpq(1) / quasi.undelayed.leading_coefficient())

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode decays; None where that was not decided."""
        return is_stable(self.determinant)

    @cached_property
    def components(self) -> tuple[DelayedComponent, ...]:
        """The components with blocks, those upstream first."""
        network = self.network
        left = self._hidden
        found = []
        for group in network.groups:
            share = left.gcd(group.modes)
            left = left / share
            signals = carriers(network.drawn, group.outputs)
            found.append(DelayedComponent(signals, group.instances, self._scaled(group.modes), self._scaled(share)))
        return tuple(found)

    @cached_property
    def _hidden(self) -> fmpq_mpoly:
        """The modes that no channel from any input to any signal shows.

        What is shown is the least common denominator of all minors of the matrix of channels (McMillan's degree). The
        determinant is a multiple of it: one over the other is what is hidden.
        """
        network = self.network
        modes, shown = self._all_modes, network.ring.one
        sources, targets = list(self.wiring.inputs), list(self.wiring.signals)
        matrix = {(to, by): network.fraction({to: fmpq(1)}, by) for to in targets for by in sources}
        for size in range(1, min(len(sources), len(targets)) + 1):
            for rows in combinations(targets, size):
                for columns in combinations(sources, size):
                    denominator = self._minor([[matrix[row, column] for column in columns] for row in rows])
                    shown = shown * (denominator / shown.gcd(denominator))
                    if not _degrees(modes / shown):
                        return network.ring.one
        return modes / shown

    def _minor(self, entries: Sequence[Sequence[tuple[fmpq_mpoly, fmpq_mpoly]]]) -> fmpq_mpoly:
        """Return the reduced denominator of a determinant of fractions."""
        if len(entries) == 1:
            return entries[0][0][1]
        ring, scale, rows = self.network.ring, self.network.ring.one, []
        for row in entries:
            common = ring.one
            for _, denominator in row:
                common = common * (denominator / common.gcd(denominator))
            rows.append([numerator * (common / denominator) for numerator, denominator in row])
            scale = scale * common
        return scale / scale.gcd(ring.determinant(rows))

    def channel(self, source: str, target: str) -> DelayedChannel:
        """Return the channel from a loop input to a signal. Raises KeyError for an unknown name."""
        network = self.network
        after = network.drawn.downstream([SignalRef(source)])
        before = network.drawn.upstream([SignalRef(target)])
        on_path, not_leading, not_reached, groups = [], [], [], []
        for group, component in zip(network.groups, self.components, strict=True):
            if any(output in after and output in before for output in group.outputs):
                on_path.append(component)
                groups.append(group)
            elif component.stable is False and any(output in after for output in group.outputs):
                not_leading.append(component)
            elif component.stable is False and any(output in before for output in group.outputs):
                not_reached.append(component)
        fraction = network.fraction({target: fmpq(1)}, source)
        modes = self._product(groups)
        return DelayedChannel(
            source,
            target,
            network.transfer(fraction),
            self._scaled(modes),
            self._scaled(modes / fraction[1]),
            tuple(on_path),
            tuple(not_leading),
            tuple(not_reached),
        )

    def together(self, ways: Sequence[tuple[Mapping[str, fmpq], str]]) -> tuple[DelayedTransfer, ...]:
        """Return sums of constant times signal or input, each per unit of a loop input, over one denominator."""
        network, common = self.network, self.network.ring.one
        fractions = [network.fraction(combination, source) for combination, source in ways]
        for _, denominator in fractions:
            common = common * (denominator / common.gcd(denominator))
        return tuple(network.transfer((numerator * (common / below), common)) for numerator, below in fractions)

    def undelayed(self, source: str, targets: Iterable[str | None]) -> bool:
        """Whether no dead time lies on a way from an input to signals: `rest` has the same channels there."""
        drawn = self.network.drawn
        signals = [SignalRef(name) for name in targets if name is not None and name in self.wiring.signals]
        between = drawn.downstream([SignalRef(source)]) & drawn.upstream(signals)
        return not any(cut.output in between for cut in self.network.cut.gaps)

    def open_at(self, signal: str, cut: Cut | None = None) -> DelayedOpenLoop:
        """Return the loop opened at a signal, for all its uses or for some. Raises KeyError for an unknown name."""
        cut = cut or Cut()
        if cut.held:
            return self._held(signal, cut)
        network, node = self.network, SignalRef(signal)
        opened = solve_delayed(cut_at(network.wiring, signal, cut))
        closed = self._modes_around(node)
        if opened.algebraic_loop is not None:
            return _ill_posed(signal, f"opened at {signal}", self._scaled(closed), opened.algebraic_loop)
        returned, below = opened.network.fraction({signal: fmpq(1)}, INJECTED)
        # 1 + L = det P / det P_open, and det P is known with all its modes.
        kept = closed / (below - returned)
        transfer = opened.network.transfer((-returned * kept, below * kept))
        reduced = opened.network.transfer((-returned, below))
        return DelayedOpenLoop(signal, transfer, reduced, self._scaled(closed))

    def _held(self, signal: str, cut: Cut) -> DelayedOpenLoop:
        """Return the loop opened at a signal with others held open."""
        whole = solve_delayed(held_open(self.wiring, cut.held))
        if whole.algebraic_loop is not None:
            held = f"with {', '.join(cut.held)} open"
            return _ill_posed(signal, held, Quasi.rational(fmpq_poly([0, 1])), whole.algebraic_loop)
        return whole.open_at(signal, Cut(cut.forms, cut.instances))

    def _modes_around(self, node: SignalRef) -> fmpq_mpoly:
        """Return the modes of the blocks in a cycle with a node and of what shares them; 1 if it stands in none."""
        drawn = self.network.drawn
        component = next(component for component in drawn.equations.components if node in component)
        for group in self.network.groups:
            if any(output in component for output in group.outputs):
                return group.modes
        return self.network.ring.one

    @property
    def strong_feed_through(self) -> tuple[StrongFeedThrough, ...]:
        """The loops, with every dead time cut, that any further delay would destabilise."""
        return self.rest.strong_feed_through


def solved(wiring: Wiring) -> LoopSolution | DelayedSolution:
    """Solve a wiring with or without dead times."""
    return solve_delayed(wiring) if has_dead_time(wiring) else solve(wiring)


def solve_delayed(wiring: Wiring) -> DelayedSolution:
    """Solve a wiring. Raises KeyError for a reference to nothing; an algebraic loop is part of the answer."""
    network = DelayedNetwork.of(wiring)
    rest = LoopSolution.of(network.rest)
    return DelayedSolution(wiring, rest, rest.algebraic_loop, network)


def _ill_posed(signal: str, where: str, closed: Quasi, found: AlgebraicLoop) -> DelayedOpenLoop:
    reason = f"{where}, the loop leaves an algebraic loop behind. {found.reason}"
    nothing = DelayedTransfer(Quasi(()), Quasi(()))
    return DelayedOpenLoop(signal, nothing, nothing, closed, AlgebraicLoop(found.signals, reason))


def _degrees(element: fmpq_mpoly) -> bool:
    return any(degree > 0 for degree in element.degrees())
