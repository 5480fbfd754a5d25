"""Dead times of the blocks in s, moved to what drives them: held outputs and loop inputs that arrive later.

A block with a dead time does to its input what the block without it does to the input of that time ago. So its inputs
are replaced by later ones: a held output or a loop input by itself later (`law.output @ 3/100`), the output of another
block by that of a copy of it whose inputs are later. A dead time inside a loop of blocks in s would be moved round for
ever, and is refused.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from flint import fmpq

from specgate.systems.blocks import Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.equations import Combination, Equations
from specgate.terms.records import record

REFUSED = "a dead time inside a loop of blocks in s is not answered beside a sampled block"
_DEEPEST = 60


@record
class Punctual:
    """A continuous wiring without dead times.

    late: what its further inputs are: an input of the wiring as drawn, and how much later. copies: further instances,
    and of which they are copies.
    """

    wiring: Wiring
    late: Mapping[str, tuple[str, fmpq]]
    copies: Mapping[str, str]


def punctual(wiring: Wiring) -> Punctual:
    """Return a wiring without dead times that does the same. Raises ValueError for one inside a loop."""
    if all(one.block.dead_time == 0 for one in wiring.instances):
        return Punctual(wiring, {}, {})
    return _Moved(wiring).result()


class _Moved:
    def __init__(self, wiring: Wiring) -> None:
        self._wiring = wiring
        self._equations = Equations(wiring)
        self._late: dict[str, tuple[str, fmpq]] = {}
        self._copies: dict[str, str] = {}
        self._made: list[Instance] = []

    def result(self) -> Punctual:
        """Return the wiring with every dead time moved."""
        own = [self._moved(one, one.name, fmpq(0), 0) for one in self._wiring.instances]
        inputs = (*self._wiring.inputs, *self._late)
        return Punctual(Wiring(inputs, (*own, *self._made), self._wiring.signals), self._late, self._copies)

    def _moved(self, one: Instance, name: str, later: fmpq, depth: int) -> Instance:
        """Return an instance, or a later copy of it under another name, without its dead time."""
        if depth > _DEEPEST:
            raise ValueError(REFUSED)
        later = later + one.block.dead_time
        block = replace(one.block, dead_time=fmpq(0))
        if later == 0:
            return Instance(name, block, one.arguments)
        arguments = {
            port: self._form(self._equations.arguments[one.name, port], later, depth) for port in one.block.inputs
        }
        return Instance(name, block, arguments)

    def _form(self, combination: Combination, later: fmpq, depth: int) -> LinearForm:
        terms: list[tuple[fmpq, SignalRef | OutputRef]] = []
        for reference, factor in combination.items():
            for known, share in self._equations.static[reference].items():
                if isinstance(known, OutputRef):
                    terms.append((factor * share, OutputRef(self._copy(known.instance, later, depth), known.output)))
                elif known.name in self._wiring.inputs:
                    terms.append((factor * share, SignalRef(self._source(known.name, later))))
                else:
                    raise ValueError(REFUSED)
        return LinearForm(tuple(terms))

    def _source(self, name: str, later: fmpq) -> str:
        late = f"{name} @ {later}"
        self._late[late] = (name, later)
        return late

    def _copy(self, instance: str, later: fmpq, depth: int) -> str:
        name = f"{instance} @ {later}"
        if name not in self._copies:
            self._copies[name] = instance
            self._made.append(self._moved(self._equations.instances[instance], name, later, depth + 1))
        return name
