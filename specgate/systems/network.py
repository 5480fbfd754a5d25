"""The solved equations of a wiring: components with their modes, and any node as a fraction of an input."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cached_property

from flint import fmpq_poly, fmpz_poly

from specgate.systems.blocks import LinearForm, OutputRef, SignalRef
from specgate.systems.elimination import Triangle, triangulate
from specgate.systems.equations import Equations, Reference
from specgate.systems.graph import reached, reversed_arcs
from specgate.systems.modes import block_modes
from specgate.systems.polynomials import ONE, exact_quotient, monic, product
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record


@record
class Group:
    """Strongly connected components that share blocks, with the modes of these blocks as closed (monic)."""

    outputs: tuple[OutputRef, ...]
    instances: tuple[str, ...]
    modes: fmpq_poly


@record
class Network:
    """Equations and their elimination."""

    equations: Equations

    @cached_property
    def blocks(self) -> tuple[tuple[int, ...], ...]:
        """The strongly connected components as numbers of unknowns, those upstream first."""
        numbers = {node: self.equations.variables[node] for node in self.equations.unknowns}
        found = (tuple(numbers[n] for n in component if n in numbers) for component in self.equations.components)
        return tuple(block for block in found if block)

    @cached_property
    def triangle(self) -> Triangle:
        """The equations, triangular."""
        return triangulate(self.equations.rows, self.blocks)

    def fraction(self, node: Reference, source: SignalRef) -> TransferFunction:
        """Return the transfer function from a loop input to a node, reduced."""
        numerators, denominator = self._numerators[source], fmpq_poly(self.triangle.determinant)
        total = fmpq_poly()
        for known, factor in self.equations.static[node].items():
            if known == source:
                total += denominator * factor
            elif self.equations.variables[known] in numerators:
                total += fmpq_poly(numerators[self.equations.variables[known]]) * factor
        return TransferFunction(total, denominator).reduced()

    def total(self, form: LinearForm, source: SignalRef) -> TransferFunction:
        """Return the transfer function from a loop input to a form of signals, outputs and inputs, reduced."""
        if len(form.terms) == 1 and form.terms[0][0] == 1:
            return self.fraction(form.terms[0][1], source)
        found = TransferFunction(fmpq_poly(), ONE)
        for factor, node in form.terms:
            one = self.fraction(node, source)
            found = TransferFunction(
                found.numerator * one.denominator + one.numerator * found.denominator * factor,
                found.denominator * one.denominator,
            ).reduced()
        return found

    @cached_property
    def _numerators(self) -> Mapping[SignalRef, Mapping[int, fmpz_poly]]:
        """The outputs per unit of each input, over the determinant of all equations."""
        return {source: self.triangle.numerators(self.equations.variables[source]) for source in self.equations.inputs}

    @cached_property
    def groups(self) -> tuple[Group, ...]:
        """The components with blocks, those upstream first; all must have been solved."""
        determinants = [fmpq_poly(determinant) for determinant in self.triangle.determinants]
        merged = merged_blocks(self)
        return tuple(self._group(members, determinants) for members in merged)

    def _group(self, members: Sequence[int], determinants: Sequence[fmpq_poly]) -> Group:
        unknowns = [self.equations.unknowns[variable] for index in members for variable in self.blocks[index]]
        outputs = tuple(unknown for unknown in unknowns if isinstance(unknown, OutputRef))
        instances = tuple(dict.fromkeys(output.instance for output in outputs))
        blocks = [self.equations.instances[name].block for name in instances]
        # P has each denominator once for every output of its block; the modes are there once.
        written = product(block.denominator ** len(block.outputs) for block in blocks)
        closed = product(determinants[index] for index in members) * product(map(block_modes, blocks))
        return Group(outputs, instances, monic(exact_quotient(closed, written)))

    def downstream(self, nodes: Iterable[Reference]) -> frozenset[Reference]:
        """Return the nodes that `nodes` act on, these included."""
        return self._reached(tuple(nodes), back=False)

    def upstream(self, nodes: Iterable[Reference]) -> frozenset[Reference]:
        """Return the nodes that act on `nodes`, these included."""
        return self._reached(tuple(nodes), back=True)

    def _reached(self, nodes: tuple[Reference, ...], *, back: bool) -> frozenset[Reference]:
        known = self._known_reach
        if (nodes, back) not in known:
            known[nodes, back] = reached(nodes, self._reversed if back else self.equations.arcs)
        return known[nodes, back]

    @cached_property
    def _known_reach(self) -> dict[tuple[tuple[Reference, ...], bool], frozenset[Reference]]:
        """What was reached so far: many channels begin at one input, or end at one signal."""
        return {}

    @cached_property
    def _reversed(self) -> Mapping[Reference, Sequence[Reference]]:
        return reversed_arcs(self.equations.arcs)


def merged_blocks(network: Network) -> list[list[int]]:
    """Return the numbers of the components in sets that share no block with each other, in the order of their first."""
    return _merged(network.blocks, [output.instance for output in network.equations.outputs])


def _merged(blocks: Sequence[Sequence[int]], owner: Sequence[str]) -> list[list[int]]:
    """Return the numbers of the blocks in sets that share no owner with each other, in the order of their first."""
    sets: list[tuple[set[str], list[int]]] = []
    for index, block in enumerate(blocks):
        owners, members = {owner[variable] for variable in block if variable < len(owner)}, [index]
        for known in [known for known in sets if known[0] & owners]:
            sets.remove(known)
            owners, members = owners | known[0], known[1] + members
        sets.append((owners, members))
    return sorted(sorted(members) for _, members in sets)
