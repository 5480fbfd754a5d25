"""Values before the input starts, of what has no name of its own: sums that feed blocks, and outputs of blocks."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from flint import fmpq

from specgate.project.instantiate import InstantiatedLoop
from specgate.systems.blocks import LinearForm, OutputRef, SignalRef
from specgate.terms.dimensions import TEMPERATURE
from specgate.terms.unit import Unit

Reference = SignalRef | OutputRef
_ZERO = fmpq(0)


class Rest:
    """The values of one loop at rest.

    A signal rests where the loop says, at 0 where it does not say. An output rests where the signals say that are made
    of it; if none is, at the stationary output of its block; if it has none (an integrator), at 0.
    """

    def __init__(self, built: InstantiatedLoop, declared: Sequence[str], unnamed: Mapping[str, LinearForm]) -> None:
        """Take a wiring, and what signals are made of that the loop does not declare."""
        self._built, self._wiring, self._declared, self._unnamed = built, built.wiring, declared, unnamed
        self._instances = {one.name: one for one in built.wiring.instances}

    def carried(self, name: str) -> str | None:
        """Return the declared signal or input that another signal is the same as, None if it is none of them."""
        form = self._unnamed[name]
        if len(form.terms) != 1 or form.terms[0][0] != 1:
            return None
        named = self._named(form.terms[0][1])
        return named or next((other for other in self._declared if self._wiring.signals.get(other) == form), None)

    def at(self, name: str, unit: Unit) -> fmpq:
        """Return the rest value of a signal that the loop does not name, from the zero of `unit`, coherent SI.

        A sum of temperatures whose factors come to one is a temperature again; other sums are differences.
        """
        carried = self.carried(name)
        form = self._unnamed[name] if carried is None else LinearForm(((fmpq(1), SignalRef(carried)),))
        value = self._sum(form)
        if unit.dimension != TEMPERATURE or sum((factor for factor, _ in form.terms), _ZERO) != 1:
            return value
        zero = sum((factor * self._zero(reference, unit) for factor, reference in form.terms), _ZERO)
        return value + zero - unit.zero

    def _named(self, reference: Reference) -> str | None:
        """Return the name of a declared signal; what stands for the output of a block outside the wiring has none."""
        known = isinstance(reference, SignalRef) and reference.name in self._declared
        return reference.name if isinstance(reference, SignalRef) and known else None

    def _zero(self, reference: Reference, otherwise: Unit) -> fmpq:
        named = self._named(reference)
        return otherwise.zero if named is None else self._built.signals.unit(named).zero

    def _sum(self, form: LinearForm) -> fmpq:
        return sum((factor * self._value(reference) for factor, reference in form.terms), _ZERO)

    def _value(self, reference: Reference) -> fmpq:
        named = self._named(reference)
        if named is not None:
            return self._built.rest[named]
        said = self._said(reference)
        return self._stationary(reference) if said is None else said

    def _said(self, output: Reference) -> fmpq | None:
        """Return what the equation of a signal leaves for an output that it is made of."""
        for name in self._declared:
            form = self._wiring.signals.get(name)
            share = None if form is None else next((factor for factor, one in form.terms if one == output), None)
            if form is None or share is None:
                continue
            others = [(factor, one) for factor, one in form.terms if one != output]
            if all(self._named(one) for _, one in others):
                return (self._built.rest[name] - self._sum(LinearForm(tuple(others)))) / share
        return None

    def _stationary(self, output: Reference) -> fmpq:
        instance = self._instances.get(output.instance) if isinstance(output, OutputRef) else None
        if not isinstance(output, OutputRef) or instance is None or instance.block.denominator[0] == 0:
            return _ZERO
        block = instance.block
        gains = ((block.numerators.get((output.output, name)), name) for name in block.inputs)
        total = sum(
            (numerator[0] * self._sum(instance.arguments[name]) for numerator, name in gains if numerator is not None),
            _ZERO,
        )
        return total / block.denominator[0]
