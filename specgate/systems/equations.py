"""A wiring as equations: the graph as drawn, and P(s) x = Q(s) u over the outputs of the blocks."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

from flint import fmpq, fmpq_mat, fmpq_poly, fmpz

from specgate.systems.blocks import Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.elimination import Row
from specgate.systems.graph import strong_components

Reference = SignalRef | OutputRef
Combination = Mapping[Reference, fmpq]
"""Coefficients of block outputs and loop inputs, none of them zero."""


def combined(form: LinearForm) -> dict[Reference, fmpq]:
    """Return the coefficient of each reference of a form; those that cancel inside the form are left out."""
    coefficients: dict[Reference, fmpq] = {}
    for factor, reference in form.terms:
        coefficients[reference] = coefficients.get(reference, fmpq(0)) + factor
    return {reference: factor for reference, factor in coefficients.items() if factor != 0}


@dataclass(frozen=True)
class Equations:
    """The equations of a wiring. Raises KeyError for a reference to nothing."""

    wiring: Wiring

    @cached_property
    def instances(self) -> Mapping[str, Instance]:
        """The applied blocks by name."""
        return {instance.name: instance for instance in self.wiring.instances}

    @cached_property
    def outputs(self) -> tuple[OutputRef, ...]:
        """All outputs of all applied blocks: the unknowns of P."""
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
    def static(self) -> Mapping[Reference, Combination]:
        """Every signal, output and input as a combination of outputs and inputs: the sums solved for the signals.

        Raises ZeroDivisionError if the sums do not determine the signals.
        """
        names = list(self.forms)
        knowns: list[Reference] = [*self.outputs, *self.inputs]
        result: dict[Reference, Combination] = {known: {known: fmpq(1)} for known in knowns}
        row = {SignalRef(name): index for index, name in enumerate(names)}
        column = {known: index for index, known in enumerate(knowns)}
        left = fmpq_mat(len(names), len(names))
        right = fmpq_mat(len(names), len(knowns))
        for name, form in self.forms.items():
            index = row[SignalRef(name)]
            left[index, index] = fmpq(1)
            for reference, factor in form.items():
                if isinstance(reference, SignalRef) and reference in row:
                    left[index, row[reference]] -= factor
                else:
                    right[index, column[reference]] += factor
        solved = left.solve(right).tolist()
        for name, entries in zip(names, solved, strict=True):
            result[SignalRef(name)] = {known: entries[i] for known, i in column.items() if entries[i] != 0}
        return result

    @cached_property
    def variables(self) -> Mapping[Reference, int]:
        """Numbers of the unknowns (outputs), then of the inputs."""
        known: tuple[Reference, ...] = (*self.outputs, *self.inputs)
        return {reference: index for index, reference in enumerate(known)}

    @cached_property
    def rows(self) -> tuple[Row, ...]:
        """One row for each output: denominator times output - sum of numerators times arguments = 0."""
        return tuple(self._row(output) for output in self.outputs)

    def _row(self, output: OutputRef) -> Row:
        entries = {self.variables[output]: self.instances[output.instance].block.denominator}
        for numerator, argument in self.read_by(output):
            for reference, factor in argument.items():
                for known, share in self.static[reference].items():
                    number = self.variables[known]
                    entries[number] = entries.get(number, fmpq_poly()) - numerator * (factor * share)
        entries = {number: entry for number, entry in entries.items() if entry}
        common = fmpz(1)
        for entry in entries.values():
            common = common.lcm(entry.denom())
        return {number: (entry * common).numer() for number, entry in entries.items()}

    @cached_property
    def components(self) -> tuple[tuple[Reference, ...], ...]:
        """The strongly connected components of the graph as drawn, those upstream first."""
        return strong_components(self.arcs)
