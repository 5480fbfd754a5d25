"""Blocks in s put together: one exact state space for some of the blocks of a wiring."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from functools import cached_property

from flint import fmpq, fmpq_mat

from specgate.sampled.state_space import Row, StateSpace, diagonal, identity, of_rows, realised
from specgate.systems.blocks import LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.equations import Equations, Reference, combined

Line = tuple[Row, Row]
"""What a signal is: a row over the states and one over the sources."""


class Plant:
    """The blocks `members` of a continuous wiring, driven by the inputs `sources` of it; all others are at rest.

    Raises ValueError for an improper block, or for blocks that leave their signals undetermined.
    """

    def __init__(self, wiring: Wiring, members: Collection[str], sources: Sequence[str]) -> None:
        self._equations = Equations(wiring)
        self._instances = [one for one in wiring.instances if one.name in members]
        self._source = {SignalRef(name): number for number, name in enumerate(sources)}
        if self._equations.implicit:
            raise ValueError("the sums of the loop do not determine its signals by themselves")
        self._parts = [realised(one.block) for one in self._instances]

    @cached_property
    def _outputs(self) -> Mapping[Reference, int]:
        nodes = [OutputRef(one.name, output) for one in self._instances for output in one.block.outputs]
        return {node: number for number, node in enumerate(nodes)}

    @cached_property
    def _fed(self) -> tuple[fmpq_mat, fmpq_mat]:
        """What is fed to the blocks: factors of their own outputs and of the sources."""
        arguments = [
            self._spread(self._equations.arguments[one.name, name])
            for one in self._instances
            for name in one.block.inputs
        ]
        return (
            of_rows([own for own, _ in arguments], len(self._outputs)),
            of_rows([outside for _, outside in arguments], len(self._source)),
        )

    def _spread(self, combination: Mapping[Reference, fmpq]) -> tuple[Row, Row]:
        """Write a combination of references as rows over outputs and sources."""
        own, outside = [fmpq(0)] * len(self._outputs), [fmpq(0)] * len(self._source)
        for reference, factor in combination.items():
            for known, share in self._equations.static[reference].items():
                if known in self._outputs:
                    own[self._outputs[known]] += factor * share
                elif isinstance(known, SignalRef) and known in self._source:
                    outside[self._source[known]] += factor * share
        return own, outside

    @cached_property
    def _solved(self) -> tuple[fmpq_mat, fmpq_mat]:
        """The outputs as rows over states and sources."""
        c, d = diagonal(part.c for part in self._parts), diagonal(part.d for part in self._parts)
        own, outside = self._fed
        around = identity(len(self._outputs)) - d * own
        if around.nrows() and around.det() == 0:
            raise ValueError("blocks without a lag feed each other and do not determine their outputs")
        back = around.inv() if around.nrows() else around
        return back * c, back * d * outside

    @property
    def order(self) -> int:
        """How many states there are."""
        return sum(part.order for part in self._parts)

    @cached_property
    def dynamics(self) -> tuple[fmpq_mat, fmpq_mat]:
        """A and B: x' = A x + B sources."""
        a, b = diagonal(part.a for part in self._parts), diagonal(part.b for part in self._parts)
        own, outside = self._fed
        states, sources = self._solved
        return a + b * own * states, b * (own * sources + outside)

    def line(self, form: LinearForm) -> Line:
        """Return a form as rows over states and sources."""
        own, outside = self._spread(combined(form))
        states, sources = self._solved
        first, second = [fmpq(0)] * self.order, list(outside)
        for number, factor in enumerate(own):
            if factor != 0:
                first = [one + factor * states[number, j] for j, one in enumerate(first)]
                second = [one + factor * sources[number, j] for j, one in enumerate(second)]
        return first, second

    def seen(self, forms: Sequence[LinearForm]) -> StateSpace:
        """Return the state space from the sources to some forms, with every mode."""
        a, b = self.dynamics
        lines = [self.line(form) for form in forms]
        return StateSpace(
            a, b, of_rows([one for one, _ in lines], self.order), of_rows([two for _, two in lines], len(self._source))
        )
