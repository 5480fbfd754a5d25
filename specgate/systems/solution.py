"""A wiring solved: every mode, algebraic loops, channels with their hidden modes, the loop opened at a signal.

Nothing is reduced behind the user's back: what cancels between blocks stays in `determinant` and is named as hidden.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property

from flint import fmpq, fmpq_poly

from specgate.systems.blocks import LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.equations import Equations, Reference
from specgate.systems.feedthrough import AlgebraicLoop, direct_cycles, is_proper, signals_of
from specgate.systems.hidden import hidden_modes
from specgate.systems.network import Network
from specgate.systems.opening import Cut, OpenLoop, opened
from specgate.systems.polynomials import exact_quotient, product
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.systems.wellposed import algebraic_loop
from specgate.terms.records import record

__all__ = ["AlgebraicLoop", "Channel", "Component", "Cut", "LoopSolution", "OpenLoop", "StrongFeedThrough", "solve"]


@record
class Component:
    """Applied blocks that act on each other (or share their modes), with the modes they have together.

    signals: those in the cycle; of blocks outside every cycle the signals that carry their outputs.
    instances: names of the applied blocks. modes: monic, every mode with its multiplicity.
    hidden: those modes that no channel from any loop input to any signal shows, monic.
    """

    signals: tuple[str, ...]
    instances: tuple[str, ...]
    modes: fmpq_poly
    hidden: fmpq_poly

    @cached_property
    def stable(self) -> bool:
        """Whether every mode decays."""
        return is_hurwitz(self.modes)


@record
class Channel:
    """From a loop input to a signal.

    transfer: not reduced; its denominator is `modes`. modes: product over the components on a path from the input to
    the signal, monic. hidden: in modes and not in the reduced transfer, monic, with multiplicity.
    components: those on a path. unstable_not_leading: unstable components that the input reaches but that do not act
    on the signal; unstable_not_reached: unstable components that act on the signal but are not reached by the input.
    """

    source: str
    target: str
    transfer: TransferFunction
    modes: fmpq_poly
    hidden: fmpq_poly
    components: tuple[Component, ...]
    unstable_not_leading: tuple[Component, ...]
    unstable_not_reached: tuple[Component, ...]

    @property
    def stable(self) -> bool:
        """Whether every mode on the way decays, shown or hidden."""
        return is_hurwitz(self.modes)

    @property
    def hides_instability(self) -> bool:
        """Whether a hidden mode on the way does not decay: the reduced channel says nothing of the loop."""
        return not is_hurwitz(self.hidden)


@record
class StrongFeedThrough:
    """A well-posed loop that passes its signals on at once, with a gain of magnitude one or more.

    Any delay in it, however short, destabilises. gain: L at infinite frequency, the largest in magnitude of those at
    the signals of the loop; None where it is infinite.
    """

    signals: tuple[str, ...]
    gain: fmpq | None


@record
class LoopSolution:
    """A wiring and what follows from it.

    algebraic_loop: signals that are not determined; where it is set, everything else raises ValueError.
    """

    wiring: Wiring
    algebraic_loop: AlgebraicLoop | None
    _network: Network

    @staticmethod
    def of(network: Network) -> LoopSolution:
        """Return what follows from the equations of a wiring."""
        return LoopSolution(network.equations.wiring, algebraic_loop(network), network)

    @property
    def network(self) -> Network:
        """The solved equations."""
        if self.algebraic_loop is not None:
            raise ValueError(self.algebraic_loop.reason)
        return self._network

    @cached_property
    def determinant(self) -> fmpq_poly:
        """The characteristic polynomial det P, monic: every mode with its multiplicity, cancelled or not."""
        return product(group.modes for group in self.network.groups)

    @property
    def stable(self) -> bool:
        """Whether every mode decays."""
        return is_hurwitz(self.determinant)

    @cached_property
    def components(self) -> tuple[Component, ...]:
        """The components with blocks, those upstream first."""
        hidden = hidden_modes(self.network)
        return tuple(
            Component(carriers(self.network, group.outputs), group.instances, group.modes, concealed)
            for group, concealed in zip(self.network.groups, hidden, strict=True)
        )

    def channel(self, source: str, target: str) -> Channel:
        """Return the channel from a loop input to a signal. Raises KeyError for an unknown name."""
        return self.channel_to(source, target, LinearForm(((fmpq(1), SignalRef(target)),)))

    def channel_to(self, source: str, target: str, form: LinearForm) -> Channel:
        """Return the channel from a loop input to a sum of inputs, signals and outputs; target: what it is called.

        Raises KeyError for an unknown name.
        """
        network = self.network
        after, before = network.downstream([SignalRef(source)]), network.upstream([node for _, node in form.terms])
        on_path, not_leading, not_reached = [], [], []
        for group, component in zip(network.groups, self.components, strict=True):
            if any(output in after and output in before for output in group.outputs):
                on_path.append(component)
            elif not component.stable and any(output in after for output in group.outputs):
                not_leading.append(component)
            elif not component.stable and any(output in before for output in group.outputs):
                not_reached.append(component)
        modes = product(component.modes for component in on_path)
        reduced = network.total(form, SignalRef(source))
        hidden = exact_quotient(modes, reduced.denominator)
        return Channel(
            source,
            target,
            TransferFunction(reduced.numerator * hidden, modes),
            modes,
            hidden,
            tuple(on_path),
            tuple(not_leading),
            tuple(not_reached),
        )

    def open_at(self, signal: str, cut: Cut | None = None) -> OpenLoop:
        """Return the loop opened at a signal, for all its users unless `cut` says which.

        Raises KeyError for an unknown name.
        """
        return opened(self.network, signal, cut)

    @cached_property
    def strong_feed_through(self) -> tuple[StrongFeedThrough, ...]:
        """The loops that any delay would destabilise."""
        found = []
        for component in self.network.equations.components:
            for cycle in self._cycles(component):
                strong = [(name, gain) for name, gain in cycle if gain is None or abs(gain) >= 1]
                if strong:
                    gains = [gain for _, gain in strong]
                    largest = None if None in gains else max((g for g in gains if g is not None), key=abs)
                    found.append(StrongFeedThrough(tuple(name for name, _ in cycle), largest))
        return tuple(found)

    def _cycles(self, component: tuple[Reference, ...]) -> list[list[tuple[str, fmpq | None]]]:
        """Return the cycles of direct feed-through of a component: signals with their L at infinite frequency."""
        equations = self.network.equations
        if all(is_proper(equations, node) for node in component):
            return [list(cycle.loop_gains()) for cycle in direct_cycles(equations, component)]
        gains: list[tuple[str, fmpq | None]] = []
        for name in signals_of(component):
            loop = self.open_at(name)
            excess = loop.numerator.degree() - loop.denominator.degree()
            if loop.algebraic_loop is not None or excess > 0:
                gains.append((name, None))
            elif excess == 0:
                gains.append((name, loop.numerator.leading_coefficient() / loop.denominator.leading_coefficient()))
        return [gains] if gains else []


def solve(wiring: Wiring) -> LoopSolution:
    """Solve a wiring. Raises KeyError for a reference to nothing; an algebraic loop is part of the answer."""
    return LoopSolution.of(Network(Equations(wiring)))


def carriers(network: Network, outputs: Sequence[OutputRef]) -> tuple[str, ...]:
    """Return the signals in the cycles of outputs; if there are none, those whose sums read them (nested or not)."""
    equations = network.equations
    cycles = [c for c in equations.components if not set(c).isdisjoint(outputs)]
    inside = signals_of(node for component in cycles for node in component)
    if inside:
        return inside
    carried: dict[str, None] = {}
    waiting: list[Reference] = list(outputs)
    while waiting:
        for fed in equations.arcs[waiting.pop()]:
            if isinstance(fed, SignalRef):
                carried[fed.name] = None
            else:
                waiting.append(fed)
    return tuple(name for name in equations.forms if name in carried)
