"""Modes of a sampled loop as modes in s: s = ln(z)/T, the one whose frequency is at most pi/T.

A mode at z = 0 is gone after a few samples: its decay is without limit, its damping ratio one. A mode at a negative
real z alternates from sample to sample, which is an oscillation at pi/T.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import reduce

from flint import acb, arb

from specgate.response.answers import Answer
from specgate.sampled.solution import SampledSolution
from specgate.systems.roots import Root
from specgate.terms.precision import working_precision

_GUARD = 64
UNTOLD = "two modes of the sampled loop are too close to be told apart"


def least_over_modes(
    solution: SampledSolution, of: Callable[[acb], arb], which: Callable[[Root], bool], none: str
) -> Answer:
    """Return the least of a figure over the modes in s that come from those in z that `which` picks."""
    known = solution.roots(128)
    if known is None:
        return Answer.undecided(UNTOLD)
    if not any(which(root) for root in known):
        return Answer.nothing(none)

    def refine(bits: int) -> arb:
        precision = bits + _GUARD
        while True:
            roots = solution.roots(precision)
            if roots is not None:
                with working_precision(precision):
                    figures = [of(in_s(root.value, solution)) for root in roots if which(root)]
                    least = reduce(lambda one, other: one.min(other), figures)
                if least.rel_accuracy_bits() >= bits or precision > 4 * bits + 512:
                    return least
            precision *= 2

    return Answer.of_ball(refine)


def in_s(z: acb, solution: SampledSolution) -> acb:
    """Return ln(z)/T; of a negative real z the one in the upper half plane."""
    if z.imag.is_zero() and z.real < 0:
        return acb((-z.real).log(), arb.pi()) / solution.period
    return z.log() / solution.period


def is_dead(root: Root) -> bool:
    """Whether a mode is at z = 0."""
    return bool(root.value.contains(0))


def is_at_one(root: Root) -> bool:
    """Whether a mode is at z = 1."""
    return bool((root.value - 1).contains(0))


def oscillates(root: Root) -> bool:
    """Whether a mode oscillates: a pair, or one at a negative real z."""
    return not is_dead(root) and (not root.value.imag.is_zero() or bool(root.value.real < 0))
