"""Checks of one loop: its wires, what it rests at, what drives its responses."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from flint import fmpq

from specgate.project import faults
from specgate.project.blocks import BuiltBlock
from specgate.project.excitations import check_excitation, check_together
from specgate.project.faults import Fault, Faults
from specgate.project.parameters import Values, evaluate
from specgate.project.percent import refuse_ambiguous
from specgate.project.rational_forms import refuse_written_rate
from specgate.project.signals import LoopSignals, calls, misfit
from specgate.project.subsystem_checks import wants
from specgate.project.types import Excitation, Response, Value
from specgate.project.wiring import wire
from specgate.terms.dimensions import RATE, TIME
from specgate.terms.expressions import literal_unit
from specgate.terms.unit import Unit

_SECOND = Unit("s", fmpq(1), 0, TIME)

_QUANTITIES: Mapping[str, Callable[[Unit], Unit]] = {
    "size": lambda signal: signal,
    "amplitude": lambda signal: signal,
    "slope": lambda signal: signal / _SECOND,
    "curvature": lambda signal: signal / _SECOND**2,
    "area": lambda signal: signal * _SECOND,
    "density": lambda signal: signal**2 * _SECOND,
    "duration": lambda _: _SECOND,
    "at": lambda _: _SECOND,
    "frequency": lambda _: Unit("rad/s", fmpq(1), 0, RATE),
}
"""Unit of what an input is described by, from the unit of the signal that it drives."""

_NOT_ZERO = frozenset({"size", "amplitude", "slope", "curvature", "area", "density"})


def check_loop(signals: LoopSignals, blocks: Mapping[str, BuiltBlock], found: Faults) -> None:
    """Note everything wrong with a loop; `blocks` are those of its subsystems that could be built."""
    project, loop, values = signals.project, signals.loop, signals.values
    before = found.count
    for name in loop.signals:
        signals.check(name, found)
    for name, value in loop.rest.items():
        with found.noted(loop=loop.name):
            _check_rest(value, signals.unit(name), values)
    for opened in loop.breaks.values():
        with found.noted(loop=loop.name):
            signals.unit(opened.at)
    for response in loop.responses.values():
        with found.noted(loop=loop.name, response=response.name):
            signals.unit(response.to)
        with found.noted(loop=loop.name, response=response.name):
            _check_reference(response, signals)
        with found.noted(loop=loop.name, response=response.name):
            check_together(response)
        for excitation in response.excitations:
            _check_excitation(excitation, signals, found, response.name)
    used = {call.subsystem for signal in loop.signals.values() for call in calls(signal.expression)}
    if found.count == before and used <= blocks.keys():
        with found.noted(loop=loop.name):
            wire(project, loop, blocks, values)


def _check_reference(response: Response, signals: LoopSignals) -> None:
    """Check that an error can be measured from the reference. Raises Fault."""
    if response.reference in (None, "0"):
        return
    reference, unit = signals.unit(str(response.reference)), signals.unit(response.to)
    problem = misfit(reference, unit)
    if problem is not None:
        message = f"the reference `{response.reference}` is in {reference.symbol}, `{response.to}` in {unit.symbol}"
        raise Fault(faults.DIMENSION, f"{message}: {problem}", response.place)


def _check_excitation(excitation: Excitation, signals: LoopSignals, found: Faults, response: str) -> None:
    with found.noted(loop=signals.loop.name, response=response):
        signals.unit(excitation.source)
    for name, value in excitation.quantities.items():
        with found.noted(loop=signals.loop.name, response=response):
            unit = signals.unit(excitation.source)
            if name == "frequency":
                refuse_written_rate(value, signals.values)
            if name in _NOT_ZERO:
                refuse_ambiguous(value, unit, of_signal=False)
            wants(value, _QUANTITIES[name](unit), signals.values)
            _refuse_decibel(value)
            if name in _NOT_ZERO and evaluate(value, signals.values) == 0:
                raise Fault(faults.VALUE, f"`{value.as_written}`: an input of zero drives nothing", value.place)
    with found.noted(loop=signals.loop.name, response=response):
        check_excitation(excitation, signals.values)


def _check_rest(value: Value, unit: Unit, values: Values) -> None:
    """Check that a value can be counted in a signal's unit. Raises Fault."""
    wants(value, unit, values)
    _refuse_decibel(value)
    evaluate(value, values)


def _refuse_decibel(value: Value) -> None:
    unit = literal_unit(value.expression)
    if unit is not None and unit.kind == "decibel":
        raise Fault(faults.DIMENSION, f"`{value.as_written}`: a signal has no value in dB", value.place)
