"""One subsystem with values: its block, and what of it this version does not answer."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

from flint import fmpq, fmpq_poly

from specgate.project import faults
from specgate.project.controller import controller
from specgate.project.faults import Fault
from specgate.project.parameters import Values, depends_on_pi, evaluate, infer
from specgate.project.rational_forms import Rational, factored, matrix, poles_and_zeros, polynomials
from specgate.project.reader import ModelReader
from specgate.project.sampled_blocks import PeriodicBlock, sampled_block
from specgate.project.state_space import state_space
from specgate.project.types import (
    FactoredModel,
    MatrixModel,
    PidModel,
    PoleZeroModel,
    PolynomialModel,
    Project,
    SampledModel,
    StateSpaceModel,
    Subsystem,
    UnreadModel,
)
from specgate.systems.blocks import Block
from specgate.systems.transfer import TransferFunction
from specgate.terms.dimensions import TIME
from specgate.terms.expressions import as_dimension
from specgate.terms.records import record

_FORMS: Mapping[type, Callable[[ModelReader, Any], Rational]] = {
    PolynomialModel: polynomials,
    MatrixModel: matrix,
    FactoredModel: factored,
    PoleZeroModel: poles_and_zeros,
    StateSpaceModel: state_space,
    PidModel: controller,
}


@record
class BuiltBlock:
    """A block in coherent SI.

    block: None for a model in z, which is `sampled`. unsupported: why what passes through it is not answered. rounded:
    it rests on the decimal for pi. by_fit: plain numbers carry a unit that was not written.
    """

    block: Block | None
    unsupported: str | None
    rounded: bool
    by_fit: bool
    sampled: PeriodicBlock | None = None


def build(subsystem: Subsystem, values: Values) -> BuiltBlock:
    """Return the block of a subsystem. Its dead time is never approximated. Raises Fault."""
    reader = ModelReader(subsystem, values)
    if isinstance(subsystem.model, UnreadModel):
        raise Fault(faults.VALUE, "the model could not be read", subsystem.model_place, repeats=True)
    if isinstance(subsystem.model, SampledModel):
        sampled = sampled_block(reader, subsystem.model)
        return BuiltBlock(None, None, reader.rounded, reader.by_fit, sampled)
    rational = _FORMS[type(subsystem.model)](reader, subsystem.model)
    block = Block(
        subsystem.name,
        tuple(subsystem.inputs),
        tuple(subsystem.outputs),
        rational.numerators,
        rational.denominator,
        dead_time(subsystem, values),
    )
    rounded = reader.rounded or (
        subsystem.dead_time is not None and depends_on_pi(subsystem.dead_time.expression, values)
    )
    return BuiltBlock(block, None, rounded, reader.by_fit)


def transfer(project: Project, subsystem: str, values: Values) -> Mapping[tuple[str, str], TransferFunction]:
    """Return the transfer function of each (output, input) of a subsystem, its dead time left out.

    Empty for a sampled model. Raises Fault.
    """
    block = build(project.subsystems[subsystem], values).block
    if block is None:
        return {}
    zero = fmpq_poly()
    return {
        (output, source): TransferFunction(block.numerators.get((output, source), zero), block.denominator)
        for output in block.outputs
        for source in block.inputs
    }


def memoryless(built: BuiltBlock) -> bool:
    """Whether a block is a plain gain without dead time, so that two of it hold no more than one."""
    block = built.block
    if block is None or block.dead_time != 0 or block.denominator.degree() > 0:
        return False
    return all(numerator.degree() <= 0 for numerator in block.numerators.values())


def dead_time(subsystem: Subsystem, values: Values) -> fmpq:
    """Return the dead time of a subsystem in s, which is not negative. Raises Fault."""
    value = subsystem.dead_time
    if value is None:
        return fmpq(0)
    inferred = infer(value, values, subsystem.name)
    if as_dimension(inferred) != TIME:
        message = f"`{value.as_written}`: a dead time is in s, this is {inferred}"
        raise Fault(faults.DIMENSION, message, value.place)
    delay = evaluate(value, values, subsystem.name)
    if delay < 0:
        raise Fault(faults.VALUE, f"`{value.as_written}`: a dead time is not negative", value.place)
    return delay
