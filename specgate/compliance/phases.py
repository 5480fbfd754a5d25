"""The phase of a block at a frequency: of its poles and zeros, less its dead time times the frequency."""

from __future__ import annotations

from flint import arb

from specgate.approximations.figures import combined
from specgate.frequency.axis import AxisFunction
from specgate.frequency.phase import phase_at
from specgate.project.blocks import build
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Budget, Project
from specgate.response.answers import Answer
from specgate.systems.transfer import TransferFunction


def phase_of(project: Project, subsystem: str, budget: Budget, values: Values) -> Answer:
    """Return the phase of a subsystem with one input and one output at the frequency of a budget (rad)."""
    assert budget.frequency is not None
    block = build(project.subsystems[subsystem], values).block
    if block is None:
        return Answer.undecided("a sampled block has one only inside its loop")
    if len(block.inputs) != 1 or len(block.outputs) != 1:
        return Answer.undecided("it has several inputs or outputs")
    frequency = evaluate(budget.frequency, values)
    (numerator,) = block.numerators.values()
    phase = phase_at(AxisFunction(TransferFunction(numerator, block.denominator)), frequency)
    late = block.dead_time * frequency
    if phase.absent is not None or late == 0:
        return phase
    return combined(lambda ball: ball - arb(late), phase)
