"""Checks of one subsystem: its ports, the ranges of its signals, its model."""

from __future__ import annotations

from flint import fmpq

from specgate.project import faults
from specgate.project.blocks import BuiltBlock, build, dead_time
from specgate.project.counting import refuse_unsaid, shown
from specgate.project.faults import Fault, Faults
from specgate.project.parameters import Values, evaluate, infer
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.temperatures import absolute
from specgate.project.types import Port, Subsystem, Value
from specgate.terms.dimensions import RATE, TIME, Dimension
from specgate.terms.expressions import PLAIN, as_dimension
from specgate.terms.trees import Number
from specgate.terms.unit import Unit

_SECOND = Unit("s", fmpq(1), 0, TIME)
_RADIAN_PER_SECOND = Unit("rad/s", fmpq(1), 0, RATE)


def check_subsystem(subsystem: Subsystem, values: Values, found: Faults) -> BuiltBlock | None:
    """Note everything wrong with a subsystem; return its block if the model can be built."""
    for port in (*subsystem.inputs.values(), *subsystem.outputs.values()):
        _check_port(port, subsystem.name, values, found)
    _check_validity(subsystem, values, found)
    with found.noted(subsystem=subsystem.name):
        dead_time(subsystem, values)
    with found.noted(subsystem=subsystem.name):
        return build(subsystem, values)
    return None


def _check_port(port: Port, subsystem: str, values: Values, found: Faults) -> None:
    with found.noted(subsystem=subsystem):
        refuse_decibel(port.unit, port)
    ranges = (
        ("linear range", port.linear_range, port.unit.dimension),
        ("range of rates", port.rate_range, port.unit.dimension / TIME),
        ("span", port.span, port.unit.dimension),
    )
    for name, pair, dimension in ranges:
        with found.noted(subsystem=subsystem):
            if pair is not None:
                _check_range(name, pair, dimension, port, subsystem, values)


def _check_validity(subsystem: Subsystem, values: Values, found: Faults) -> None:
    """Check what the subsystem says of its model: up to which frequency it holds, and what it stands for."""
    stands_for = subsystem.stands_for
    said = (
        ("the frequency up to which a model holds", subsystem.valid_to, _RADIAN_PER_SECOND),
        ("a sampling period", None if stands_for is None else stands_for.sampled, _SECOND),
        ("a dead time", None if stands_for is None else stands_for.delay, _SECOND),
    )
    for name, value, unit in said:
        if value is not None:
            with found.noted(subsystem=subsystem.name):
                refuse_written_rate(value, values, subsystem.name)
                wants(value, unit, values, subsystem.name)
                if evaluate(value, values, subsystem.name) <= 0:
                    raise Fault(faults.VALUE, f"`{value.as_written}`: {name} is greater than zero", value.place)


def _check_range(
    name: str, pair: tuple[Value, Value], dimension: Dimension, port: Port, subsystem: str, values: Values
) -> None:
    unit = port.unit if dimension == port.unit.dimension else port.unit / _SECOND
    for value in pair:
        wants(value, unit, values, subsystem)
    low, high = (_end(value, dimension, port, subsystem, values) for value in pair)
    if low >= high:
        written = f"[{pair[0].as_written}, {pair[1].as_written}]"
        raise Fault(faults.VALUE, f"the {name} {written} is empty: the lower end comes first", pair[0].place)


def _end(value: Value, dimension: Dimension, port: Port, subsystem: str, values: Values) -> fmpq:
    unit = port.unit if dimension == port.unit.dimension else Unit("", fmpq(1))
    return absolute(value, unit, values, subsystem)


def refuse_decibel(unit: Unit, declared: Port) -> None:
    """Refuse dB as the unit of a signal. Raises Fault."""
    if unit.kind == "decibel":
        raise Fault(faults.DIMENSION, "a signal cannot be in dB, which is a ratio of amplitudes", declared.place)


def wants(value: Value, unit: Unit, values: Values, scope: str | None = None) -> None:
    """Check that a value can be counted in a unit; a plain number other than 0 does not stand for one. Raises Fault."""
    inferred = infer(value, values, scope)
    zero = isinstance(value.expression, Number) and value.expression.value == 0
    if inferred is PLAIN and zero:
        return
    if as_dimension(inferred) != unit.dimension:
        message = f"`{value.as_written}`: {unit.symbol} is wanted, this is {shown(value, inferred)}"
        raise Fault(faults.DIMENSION, message, value.place)
    refuse_unsaid(value, unit, values, scope)
