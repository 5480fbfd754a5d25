"""What a sampled loop is wired from: blocks in z with one period beside the blocks in s."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import replace
from functools import cached_property

from flint import fmpq, fmpq_poly

from specgate.sampled.late import Punctual, punctual
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.terms.records import record

LONGEST_DELAY = 100
"""Longest delay in periods, of what a block holds on all ways together: every period of it is one more mode."""


@record
class SampledBlock:
    """A block that samples its inputs at t = kT and holds its outputs from kT + delay on.

    outputs = numerators / denominator * samples of the inputs, in z, as written and proper; a missing pair is zero.
    delay: computation and dead time together (s), not negative; it may be longer than a period.
    """

    name: str
    inputs: tuple[str, ...]
    outputs: tuple[str, ...]
    numerators: Mapping[tuple[str, str], fmpq_poly]
    denominator: fmpq_poly
    delay: fmpq


@record
class SampledInstance:
    """A sampled block applied to arguments (one linear form per input of the block)."""

    name: str
    block: SampledBlock
    arguments: Mapping[str, LinearForm]

    def held(self, output: str) -> str:
        """Return the name of the signal that an output holds, an input of the continuous wiring."""
        return held(self.name, output)


def held(instance: str, output: str) -> str:
    """Return the name under which the continuous wiring reads a held output."""
    return f"{instance}.{output}"


@record
class SampledWiring:
    """A loop whose sampled blocks share one period (s).

    continuous: the blocks in s and the equations of all signals; the outputs of the sampled blocks are among its
    inputs, named by `held`. In the arguments of the sampled blocks they go by these names too.
    """

    period: fmpq
    continuous: Wiring
    instances: tuple[SampledInstance, ...]

    @cached_property
    def punctual(self) -> Punctual:
        """The continuous wiring with its dead times moved.

        Raises ValueError for one inside a loop of blocks in s, and for more than `LONGEST_DELAY` periods in all.
        """
        found = punctual(self.continuous)
        if sum(self._kept(one, found) for one in self.instances) > LONGEST_DELAY:
            raise ValueError(
                f"the delays and dead times on the ways from the sampled blocks add up to more than {LONGEST_DELAY} "
                "sampling periods, which is not worked with"
            )
        return found

    def _kept(self, one: SampledInstance, found: Punctual) -> int:
        """Return how many of the answers of a block are on their way at once."""
        later = [[more for name, more in found.late.values() if name == one.held(out)] for out in one.block.outputs]
        return sum(whole_periods(one.block.delay + max(more, default=fmpq(0)), self.period) for more in later)

    @property
    def late(self) -> bool:
        """Whether a continuous block has a dead time."""
        return any(one.block.dead_time != 0 for one in self.continuous.instances)

    def members(self, names: Collection[str]) -> tuple[str, ...]:
        """Return the continuous blocks of a set of names, and the later copies of them."""
        copies = (copy for copy, own in self.punctual.copies.items() if own in names)
        return (*(one.name for one in self.continuous.instances if one.name in names), *copies)

    def later(self, held: Sequence[str]) -> tuple[tuple[str, int, fmpq], ...]:
        """Return what arrives later of some held outputs: its name, the number of the output, how much later."""
        return tuple(
            (late, held.index(name), more) for late, (name, more) in self.punctual.late.items() if name in held
        )

    @cached_property
    def inputs(self) -> tuple[str, ...]:
        """The inputs of the loop itself."""
        return tuple(name for name in self.continuous.inputs if name not in self._held)

    @cached_property
    def _held(self) -> Mapping[str, OutputRef]:
        return {one.held(output): OutputRef(one.name, output) for one in self.instances for output in one.block.outputs}

    @cached_property
    def slow(self) -> Wiring:
        """The loop with every sampled block replaced by what it is to slow signals, in s.

        z stands for 1 + sT: near z = 1 the pulse transfer function of a held block G(s) is G(s) to leading order, so
        that orders and leading coefficients at s = 0 are those of the sampled loop at z = 1. It has the graph, the
        feed-through at the samples and the cancellations at z = 1 of the sampled loop, and nothing else of it.
        """
        step = fmpq_poly([1, self.period])
        instances = [
            *(
                Instance(
                    one.name, self._slow(one.block), {key: self._joined(form) for key, form in one.arguments.items()}
                )
                for one in self.continuous.instances
            ),
            *(
                Instance(
                    one.name,
                    Block(
                        one.block.name,
                        one.block.inputs,
                        one.block.outputs,
                        {pair: numerator(step) for pair, numerator in one.block.numerators.items()},
                        one.block.denominator(step) * step ** whole_periods(one.block.delay, self.period),
                    ),
                    {name: self._joined(form) for name, form in one.arguments.items()},
                )
                for one in self.instances
            ),
        ]
        signals = {name: self._joined(form) for name, form in self.continuous.signals.items()}
        return Wiring(self.inputs, tuple(instances), signals)

    def _slow(self, block: Block) -> Block:
        """Return a block with its dead time as so many samples: it is one to slow signals, and nothing at once."""
        step = fmpq_poly([1, self.period]) ** whole_periods(block.dead_time, self.period)
        return replace(block, denominator=block.denominator * step, dead_time=fmpq(0))

    def _joined(self, form: LinearForm) -> LinearForm:
        """Return a form that reads sampled blocks themselves instead of what they hold."""
        return LinearForm(
            tuple(
                (factor, self._held.get(node.name, node) if isinstance(node, SignalRef) else node)
                for factor, node in form.terms
            )
        )


def whole_periods(delay: fmpq, period: fmpq) -> int:
    """Return after how many samples an output is first seen by a sampler: its delay in periods, rounded up."""
    return int((delay / period).ceil())
