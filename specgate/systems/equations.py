"""A wiring as equations: the graph as drawn, and P(s) x = Q(s) u over the outputs of the blocks."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from functools import cached_property

from flint import fmpq, fmpq_mat, fmpq_poly, fmpz

from specgate.systems.blocks import Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.elimination import Row
from specgate.systems.graph import is_cycle, strong_components
from specgate.systems.polynomials import ONE
from specgate.terms.records import record

Reference = SignalRef | OutputRef
Combination = Mapping[Reference, fmpq]
"""Coefficients of block outputs and loop inputs, none of them zero."""


def combined(form: LinearForm) -> dict[Reference, fmpq]:
    """Return the coefficient of each reference of a form; those that cancel inside the form are left out."""
    coefficients: dict[Reference, fmpq] = {}
    for factor, reference in form.terms:
        coefficients[reference] = coefficients.get(reference, fmpq(0)) + factor
    return {reference: factor for reference, factor in coefficients.items() if factor != 0}


@record
class Equations:
    """The equations of a wiring. Raises KeyError for a reference to nothing."""

    wiring: Wiring

    @cached_property
    def instances(self) -> Mapping[str, Instance]:
        """The applied blocks by name."""
        return {instance.name: instance for instance in self.wiring.instances}

    @cached_property
    def outputs(self) -> tuple[OutputRef, ...]:
        """All outputs of all applied blocks."""
        return tuple(OutputRef(i.name, output) for i in self.wiring.instances for output in i.block.outputs)

    @cached_property
    def inputs(self) -> tuple[SignalRef, ...]:
        """The loop inputs."""
        return tuple(SignalRef(name) for name in self.wiring.inputs)

    @cached_property
    def forms(self) -> Mapping[str, Combination]:
        """The right-hand sides of the signals, as drawn."""
        return {name: combined(form) for name, form in self.wiring.signals.items()}

    @cached_property
    def arguments(self) -> Mapping[tuple[str, str], Combination]:
        """What is fed to each input of each applied block, as drawn: {(instance, input): …}."""
        return {
            (instance.name, name): combined(instance.arguments[name])
            for instance in self.wiring.instances
            for name in instance.block.inputs
        }

    def read_by(self, output: OutputRef) -> Iterable[tuple[fmpq_poly, Combination]]:
        """Yield the numerators of an output, none of them zero, with what they are applied to."""
        block = self.instances[output.instance].block
        for name in block.inputs:
            numerator = block.numerators.get((output.output, name))
            if numerator:
                yield numerator, self.arguments[output.instance, name]

    @cached_property
    def arcs(self) -> Mapping[Reference, Sequence[Reference]]:
        """The wiring as a graph: what each input, signal and output feeds."""
        arcs: dict[Reference, dict[Reference, None]] = {}
        nodes: tuple[Reference, ...] = (*self.inputs, *map(SignalRef, self.wiring.signals), *self.outputs)
        for node in nodes:
            arcs[node] = {}
        for name, form in self.forms.items():
            for reference in form:
                arcs[reference][SignalRef(name)] = None
        for output in self.outputs:
            for _, argument in self.read_by(output):
                for reference in argument:
                    arcs[reference][output] = None
        return {node: tuple(fed) for node, fed in arcs.items()}

    @cached_property
    def implicit(self) -> tuple[SignalRef, ...]:
        """Signals that sums alone do not determine (x = x + block(x)): they stay unknowns beside the outputs."""
        signals = [SignalRef(name) for name in self.forms]
        sums = {node: [fed for fed in self.arcs[node] if isinstance(fed, SignalRef)] for node in signals}
        cycles = [component for component in strong_components(sums) if is_cycle(component, sums)]
        return tuple(node for cycle in cycles if self._without(cycle).det() == 0 for node in cycle)

    def _without(self, nodes: Sequence[SignalRef]) -> fmpq_mat:
        """Return I - S over some signals, S[i, j] being the factor of signal j in the sum of signal i."""
        column = {node: index for index, node in enumerate(nodes)}
        matrix = fmpq_mat(len(nodes), len(nodes))
        for node, row in column.items():
            matrix[row, row] = fmpq(1)
            for reference, factor in self.forms[node.name].items():
                if isinstance(reference, SignalRef) and reference in column:
                    matrix[row, column[reference]] -= factor
        return matrix

    @cached_property
    def unknowns(self) -> tuple[Reference, ...]:
        """The unknowns of P: the outputs, and what sums do not determine."""
        return (*self.outputs, *self.implicit)

    @cached_property
    def variables(self) -> Mapping[Reference, int]:
        """Numbers of the unknowns, then of the inputs."""
        return {reference: index for index, reference in enumerate((*self.unknowns, *self.inputs))}

    @cached_property
    def static(self) -> Mapping[Reference, Combination]:
        """Every signal, output and input as a combination of unknowns and inputs: the sums solved for the signals."""
        result: dict[Reference, Combination] = {known: {known: fmpq(1)} for known in self.variables}
        signals = [SignalRef(name) for name in self.forms if SignalRef(name) not in result]
        right = fmpq_mat(len(signals), len(self.variables))
        for index, signal in enumerate(signals):
            for reference, factor in self.forms[signal.name].items():
                if reference in self.variables:
                    right[index, self.variables[reference]] += factor
        solved = self._without(signals).solve(right).tolist() if signals else []
        for signal, entries in zip(signals, solved, strict=True):
            result[signal] = {known: entry for known, entry in zip(self.variables, entries, strict=True) if entry}
        return result

    @cached_property
    def rows(self) -> tuple[Row, ...]:
        """One row for each unknown, in whole coefficients without a common divisor."""
        return tuple(self._row(unknown) for unknown in self.unknowns)

    def terms(self, unknown: Reference) -> Iterable[tuple[fmpq_poly, Combination]]:
        """Yield the terms of an unknown's equation, all on one side: polynomials with what they are applied to.

        An output: denominator times output - sum of numerators times arguments = 0. A signal: signal - sum = 0.
        """
        if isinstance(unknown, SignalRef):
            yield ONE, {unknown: fmpq(1)}
            yield -ONE, self.forms[unknown.name]
            return
        yield self.instances[unknown.instance].block.denominator, {unknown: fmpq(1)}
        for numerator, argument in self.read_by(unknown):
            yield -numerator, argument

    def _row(self, unknown: Reference) -> Row:
        entries: dict[int, fmpq_poly] = {}
        for polynomial, combination in self.terms(unknown):
            for reference, factor in combination.items():
                for known, share in self.static[reference].items():
                    number = self.variables[known]
                    entries[number] = entries.get(number, fmpq_poly()) + polynomial * (factor * share)
        entries = {number: entry for number, entry in entries.items() if entry}
        common, divisor = fmpz(1), fmpz(0)
        for entry in entries.values():
            common = common.lcm(entry.denom())
        whole = {number: (entry * common).numer() for number, entry in entries.items()}
        for numerator in whole.values():
            divisor = divisor.gcd(numerator.content())
        return {number: numerator // divisor for number, numerator in whole.items()}

    @cached_property
    def components(self) -> tuple[tuple[Reference, ...], ...]:
        """The strongly connected components of the graph as drawn, those upstream first."""
        return strong_components(self.arcs)
