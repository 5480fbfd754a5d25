"""A wiring with its dead times cut out: what is left is rational, and each cut is an input and a signal of it."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq

from specgate.systems.blocks import Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.terms.records import record


@record
class Gap:
    """A dead time (s) of an output: the signal that enters it, and the input that stands for what leaves it."""

    output: OutputRef
    delay: fmpq
    before: SignalRef
    after: SignalRef


@record
class CutWiring:
    """The rational rest of a wiring, with a signal `before` and an input `after` for each cut."""

    rest: Wiring
    gaps: tuple[Gap, ...]


def has_dead_time(wiring: Wiring) -> bool:
    """Whether any block of a wiring has a dead time."""
    return any(instance.block.dead_time != 0 for instance in wiring.instances)


def without_dead_time(wiring: Wiring) -> CutWiring:
    """Gap every dead time out of a wiring."""
    cuts = {
        output: Gap(output, instance.block.dead_time, SignalRef(f"(before) {name}"), SignalRef(f"(after) {name}"))
        for instance in wiring.instances
        if instance.block.dead_time != 0
        for output in (OutputRef(instance.name, port) for port in instance.block.outputs)
        for name in (f"{output.instance}.{output.output}",)
    }
    instances = tuple(
        Instance(i.name, i.block, {port: _replaced(form, cuts) for port, form in i.arguments.items()})
        for i in wiring.instances
    )
    signals = {name: _replaced(form, cuts) for name, form in wiring.signals.items()}
    entering = {cut.before.name: LinearForm(((fmpq(1), cut.output),)) for cut in cuts.values()}
    inputs = (*wiring.inputs, *(cut.after.name for cut in cuts.values()))
    return CutWiring(Wiring(inputs, instances, {**signals, **entering}), tuple(cuts.values()))


def _replaced(form: LinearForm, cuts: Mapping[OutputRef, Gap]) -> LinearForm:
    return LinearForm(
        tuple(
            (factor, cuts[node].after if isinstance(node, OutputRef) and node in cuts else node)
            for factor, node in form.terms
        )
    )
