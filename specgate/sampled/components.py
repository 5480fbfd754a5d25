"""The components of a sampled loop: blocks that act on each other, and the modes that they have together."""

from __future__ import annotations

from collections.abc import Callable
from functools import cached_property
from itertools import combinations

from flint import arb, arb_poly, fmpq, fmpq_poly

from specgate.sampled.blocks import SampledWiring
from specgate.sampled.circle import is_schur, is_schur_in_balls, roots_in_balls
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.plant import Plant
from specgate.sampled.rungs import kept
from specgate.sampled.state_space import realised
from specgate.sampled.steady import has_mode_at_one
from specgate.systems.polynomials import ONE, exact_quotient
from specgate.systems.roots import Root, certified_roots
from specgate.systems.stability import is_hurwitz
from specgate.terms.precision import working_precision
from specgate.terms.records import record

UNTOLD = "whether every mode decays is not told at the highest precision"

_SAME = fmpq(1, 10**50)
"""Part of a turn below which a mode turns a whole number of half turns in a period: pi is known to 60 digits."""


@record
class Component:
    """Applied blocks that act on each other (or share their modes).

    signals: those that carry it. instances: names of the blocks. free: modes in s that the samples neither drive nor
    see, monic; of blocks without a sampler in their circle these are all. cycle: what the samples close, None without a
    sampled block.
    """

    signals: tuple[str, ...]
    instances: tuple[str, ...]
    period: fmpq
    free: fmpq_poly
    cycle: Cycle | None

    @cached_property
    def stable(self) -> bool | None:
        """Whether every mode decays; None where the highest precision does not tell."""
        if not is_hurwitz(self.free):
            return False
        if self.cycle is None:
            return True
        if self.exact is not None:
            return is_schur(self.exact)
        if has_mode_at_one(self.cycle) or any(not sigma < 0 for sigma, _ in self.unseen):
            return False
        return is_schur_in_balls(self.polynomial)

    @property
    def unshown(self) -> bool:
        """Whether a mode that the samples neither drive nor see does not decay."""
        if self.cycle is None:
            return False
        return not is_hurwitz(self.free) or any(not sigma < 0 for sigma, _ in self.unseen)

    @cached_property
    def exact(self) -> fmpq_poly | None:
        """The characteristic polynomial in z of what the samples close, where it is rational; 1 without any."""
        if self.cycle is None:
            return ONE
        return None if self.cycle.exact is None else self.cycle.exact.charpoly()

    @cached_property
    def polynomial(self) -> Callable[[int], arb_poly]:
        """From a precision in bits to the characteristic polynomial in z of what the samples close, in balls."""
        return kept(self._polynomial)

    def _polynomial(self, bits: int) -> arb_poly:
        with working_precision(bits):
            if self.exact is not None:
                return arb_poly(self.exact)
        assert self.cycle is not None
        matrix = self.cycle.enclosed(bits)
        with working_precision(bits):
            return matrix.charpoly()

    def roots(self, bits: int) -> tuple[Root, ...] | None:
        """Return the modes in z with their multiplicities; None where they are not told apart."""
        with working_precision(bits):
            beside = tuple(
                Root((root.value * self.period).exp(), root.multiplicity) for root in _roots(self.free, bits)
            )
        if self.exact is not None:
            return (*beside, *_roots(self.exact, bits))
        found = roots_in_balls(self.polynomial(bits), bits)
        return None if found is None else (*beside, *(Root(value, 1) for value in found))

    @cached_property
    def unseen(self) -> tuple[tuple[arb, fmpq], ...]:
        """Oscillations that the samples cannot see: decay (real part, 1/s) and half turns in a period.

        Two modes with e^(pT) in common are one to the samples, so that of the two one is not fed back (Kalman, Ho and
        Narendra 1963). With a frequency that is a multiple of pi/T through the decimal for pi, they count as the same.
        """
        if self.cycle is None:
            return ()
        found: list[tuple[arb, fmpq]] = []
        poles = [root.value for root in _roots(self.cycle.motion.a.charpoly(), 256)]
        with working_precision(256):
            for one, other in combinations(poles, 2):
                turns = abs(one.imag - other.imag) * self.period / (2 * arb.pi())
                if one.real.overlaps(other.real) and _whole(turns) and not any(one.real is s for s, _ in found):
                    pair = one.imag.overlaps(-other.imag)
                    found.append((one.real, fmpq(_nearest(turns) * (1 if pair else 2))))
        return tuple(found)


def _whole(turns: arb) -> bool:
    """Whether a number of turns is a whole one, not zero, as far as the decimal for pi goes."""
    nearest = _nearest(turns)
    return nearest != 0 and abs(turns - nearest) < arb(_SAME * nearest)


def _nearest(turns: arb) -> int:
    return int((turns.mid().fmpq() + fmpq(1, 2)).floor())


def _roots(p: fmpq_poly, bits: int) -> tuple[Root, ...]:
    return certified_roots(p, bits) if p.degree() > 0 else ()


def component(
    wiring: SampledWiring, signals: tuple[str, ...], instances: tuple[str, ...], modes: fmpq_poly
) -> Component:
    """Put the blocks of a component together.

    modes: in s, of the blocks as a continuous loop; they count only where no sampled block is among them. Raises
    ValueError for what is not answered (an improper block in a circle with a sampled one).
    """
    sampled = [one for one in wiring.instances if one.name in instances]
    if not sampled:
        return Component(signals, instances, wiring.period, modes, None)
    sources = [one.held(output) for one in sampled for output in one.block.outputs]
    later = wiring.later(sources)
    continuous = wiring.punctual.wiring
    plant = Plant(continuous, wiring.members(instances), [*sources, *(name for name, _, _ in later)])
    least = plant.seen([one.arguments[name] for one in sampled for name in one.block.inputs]).reduced()
    # a later copy of a block is no mode of its own: those of the blocks as drawn are all there are
    own = Plant(continuous, instances, sources).dynamics[0].charpoly()
    if own % least.a.charpoly():
        raise ValueError("dead times make one block act twice in a sampled loop, which is not answered")
    free = exact_quotient(own, least.a.charpoly())
    controllers = [Controller(realised(one.block), one.block.delay) for one in sampled]
    taps = [(number, more) for _, number, more in later]
    return Component(signals, instances, wiring.period, free, Cycle(least, controllers, wiring.period, taps))
