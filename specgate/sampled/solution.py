"""A sampled loop solved: its components with every mode, whether it is stable, what it is to slow signals."""

from __future__ import annotations

from functools import cached_property

from flint import acb_poly, arb_poly, fmpq, fmpq_poly

from specgate.sampled.blocks import SampledWiring
from specgate.sampled.components import Component, component
from specgate.systems.feedthrough import AlgebraicLoop
from specgate.systems.polynomials import product
from specgate.systems.roots import Root, certified_roots
from specgate.systems.solution import LoopSolution, StrongFeedThrough, solve
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record


@record
class SlowTransfer:
    """What a transfer function of a sampled loop is to slow signals: it holds at s = 0 alone, to leading order.

    Poles and zeros at the origin are those at z = 1, the leading coefficient there is that in (z - 1)/T.
    """

    slow: TransferFunction

    @property
    def numerator(self) -> fmpq_poly:
        """Zero where the transfer function is zero."""
        return self.slow.numerator

    @property
    def poles_at_origin(self) -> int:
        """Poles at z = 1."""
        return self.slow.poles_at_origin

    @property
    def zeros_at_origin(self) -> int:
        """Zeros at z = 1."""
        return self.slow.zeros_at_origin

    @property
    def order_at_origin(self) -> int:
        """Zeros minus poles at z = 1."""
        return self.slow.order_at_origin

    @property
    def value_at_origin(self) -> fmpq:
        """The leading coefficient there, in (z - 1)/T."""
        return self.slow.value_at_origin


@record
class SampledSolution:
    """A sampled wiring and what follows from it.

    continuous: what lies between the samplers, what is held coming from outside. slow: the loop as slow signals see it
    (`SampledWiring.slow`). Where `algebraic_loop` is set, everything but these raises ValueError.
    """

    wiring: SampledWiring
    continuous: LoopSolution
    slow: LoopSolution

    @property
    def period(self) -> fmpq:
        """The sampling period (s)."""
        return self.wiring.period

    @property
    def algebraic_loop(self) -> AlgebraicLoop | None:
        """Signals that are not determined, between the samples or at them."""
        return self.continuous.algebraic_loop or self.slow.algebraic_loop

    @property
    def strong_feed_through(self) -> tuple[StrongFeedThrough, ...]:
        """The loops between the samples that any delay would destabilise."""
        return self.continuous.strong_feed_through

    @cached_property
    def components(self) -> tuple[Component, ...]:
        """The components with blocks, those upstream first. Raises ValueError for what is not answered."""
        modes = {group.instances: group.modes for group in self.continuous.network.groups}
        return tuple(
            component(self.wiring, one.signals, one.instances, modes.get(one.instances, one.modes))
            for one in self.slow.components
        )

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode decays, cancelled ones included; None where the highest precision does not tell."""
        found = [one.stable for one in self.components]
        if False in found:
            return False
        return None if None in found else True

    @cached_property
    def exact(self) -> fmpq_poly | None:
        """The characteristic polynomial in z, every mode with its multiplicity, where it is rational (monic)."""
        factors = [one.exact for one in self.components]
        rational = [one for one in factors if one is not None]
        free = product(one.free for one in self.components)
        if len(rational) < len(factors) or free != fmpq_poly([0, 1]) ** free.degree():
            return None
        return product(rational) * fmpq_poly([-1, 1]) ** free.degree()

    def polynomial(self, bits: int) -> arb_poly:
        """Return the characteristic polynomial in z in balls; a mode p of a block in s is one at e^(pT)."""
        precision = 2 * bits + 64
        result = acb_poly([1])
        for one in self.components:
            free = certified_roots(one.free, precision) if one.free.degree() > 0 else ()
            with working_precision(precision):
                for root in free:
                    result = result * acb_poly([-(root.value * self.period).exp(), 1]) ** root.multiplicity
                if one.cycle is not None:
                    result = result * acb_poly(one.polynomial(precision))
        return arb_poly([coefficient.real for coefficient in result.coeffs()])

    def roots(self, bits: int) -> tuple[Root, ...] | None:
        """Return every mode in z; those of blocks in s are e^(pT). None where some are not told apart."""
        found: list[Root] = []
        for one in self.components:
            roots = one.roots(bits)
            if roots is None:
                return None
            found += roots
        return tuple(found)


def solve_sampled(wiring: SampledWiring) -> SampledSolution:
    """Solve a sampled wiring. Raises KeyError for a reference to nothing; an algebraic loop is part of the answer.

    Raises ValueError for what is not answered: an improper block in a circle with a sampled one, a dead time inside a
    loop of blocks in s.
    """
    found = SampledSolution(wiring, solve(wiring.punctual.wiring), solve(wiring.slow))
    if found.algebraic_loop is None:
        _ = found.components
    return found
