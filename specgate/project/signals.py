"""Signals of a loop: the declared unit of each, and the dimensions of what is added, scaled and fed to blocks."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault, Faults
from specgate.project.parameters import Values, infer, values
from specgate.project.temperatures import absolute
from specgate.project.types import (
    Call,
    Loop,
    LoopInput,
    Port,
    Project,
    Scaled,
    SignalExpression,
    SignalName,
    Sum,
    Value,
)
from specgate.systems.graph import strong_components
from specgate.terms.dimensions import DIMENSIONLESS, Dimension
from specgate.terms.expressions import as_dimension
from specgate.terms.places import Place
from specgate.terms.unit import Unit

Giver = Port | LoopInput
"""What declares the unit of a signal."""


def static_order(loop: Loop) -> tuple[tuple[str, ...], ...]:
    """Return the signals so that each comes after those it is a sum of; those in a circle of sums come together.

    What passes through a block does not count: the block says its unit itself.
    """
    arcs: dict[str, list[str]] = {name: [] for name in loop.signals}
    for name, signal in loop.signals.items():
        for read in dict.fromkeys(_summed(signal.expression)):
            if read in arcs:
                arcs[read].append(name)
    return strong_components(arcs)


def _summed(node: SignalExpression) -> Iterator[str]:
    """Give the names that an expression sums, those inside the arguments of blocks left out."""
    if isinstance(node, SignalName):
        yield node.name
    elif isinstance(node, Scaled):
        yield from _summed(node.operand)
    elif isinstance(node, Sum):
        for term in node.terms:
            yield from _summed(term)


def calls(node: SignalExpression) -> Iterator[Call]:
    """Give all calls in an expression, the outer ones first."""
    if isinstance(node, Call):
        yield node
        for argument in node.arguments.values():
            yield from calls(argument)
    elif isinstance(node, Scaled):
        yield from calls(node.operand)
    elif isinstance(node, Sum):
        for term in node.terms:
            yield from calls(term)


class LoopSignals:
    """The signals of one loop with their units and what declares them."""

    def __init__(self, project: Project, loop: Loop, values: Values) -> None:
        self.project, self.loop, self.values = project, loop, values
        self.units: dict[str, Unit] = {name: given.unit for name, given in loop.inputs.items()}
        self.givers: dict[str, Giver] = dict(loop.inputs)
        self.faults: dict[str, Fault] = {}
        for circle in static_order(loop):
            self._settle(circle)

    def _settle(self, circle: tuple[str, ...]) -> None:
        waiting = [name for name in circle if name not in self.units]
        while waiting:
            # to and fro, so that what is told in one place of a circle goes round it in two passes
            left = [name for name in reversed(waiting) if not self._told(name)]
            if len(left) == len(waiting):
                self.faults.update({name: self._circle(name, repeats=name != circle[0]) for name in left})
                return
            waiting = left

    def _circle(self, name: str, *, repeats: bool) -> Fault:
        message = f"the unit of `{name}` cannot be told: it is made of nothing but itself"
        return Fault(faults.DIMENSION, message, self.loop.signals[name].place, repeats=repeats)

    def _told(self, name: str) -> bool:
        expression = self.loop.signals[name].expression
        try:
            unit, giver = self.unit_of(expression), self._giver(expression)
        except Fault as fault:
            self.faults[name] = fault
            return True
        if unit is not None:
            self.units[name] = unit
        if giver is not None:
            self.givers[name] = giver
        return unit is not None

    def unit(self, name: str) -> Unit:
        """Return the unit in which an input or signal is declared: that of the first term that has one.

        Raises Fault for an unknown name, or a signal that is defined by nothing but itself.
        """
        if name in self.units:
            return self.units[name]
        if name in self.faults:
            raise self.faults[name]
        raise self._missing(f"the loop has no input or signal `{name}`", self.loop.place)

    def span(self, name: str) -> fmpq | None:
        """Return high minus low of the span of the port that gives a signal; None without a span. Raises Fault."""
        giver = self.givers.get(name)
        if not isinstance(giver, Port) or giver.span is None:
            return None
        scope = owner(self.project, giver)
        low, high = (absolute(value, giver.unit, self.values, scope) for value in giver.span)
        return high - low

    def _giver(self, node: SignalExpression) -> Giver | None:
        if isinstance(node, SignalName):
            return self.givers.get(node.name)
        if isinstance(node, Call):
            return self.port(node)
        if isinstance(node, Scaled):
            return self._giver(node.operand) if self.factor(node) == DIMENSIONLESS else None
        return next((giver for term in node.terms if (giver := self._giver(term)) is not None), None)

    def unit_of(self, node: SignalExpression) -> Unit | None:
        """Return the unit of an expression; None where it is not known yet, or cannot be told. Raises Fault."""
        if isinstance(node, SignalName):
            self._known(node.name, node.place)
            return self.units.get(node.name)
        if isinstance(node, Call):
            return self.port(node).unit
        if isinstance(node, Sum):
            return next((unit for term in node.terms if (unit := self.unit_of(term)) is not None), None)
        unit, factor = self.unit_of(node.operand), self.factor(node)
        if unit is None or factor == DIMENSIONLESS:
            return unit
        return self._declared(factor * unit.dimension)

    def _known(self, name: str, place: Place) -> None:
        if name not in self.loop.inputs and name not in self.loop.signals:
            raise self._missing(f"the loop has no input or signal `{name}`", place)

    def _declared(self, dimension: Dimension) -> Unit:
        """Return the first unit of this dimension that the project declares, else the coherent one."""
        units = (giver.unit for giver in _givers(self.project))
        declared = next((unit for unit in units if unit.dimension == dimension), None)
        return declared or Unit(str(dimension), fmpq(1), 0, dimension)

    def port(self, call: Call) -> Port:
        """Return the output port that a call reads. Raises Fault."""
        subsystem = self.project.subsystems.get(call.subsystem)
        if subsystem is None:
            raise self._missing(f"there is no subsystem `{call.subsystem}`", call.place)
        if call.output in subsystem.outputs:
            return subsystem.outputs[call.output]
        raise self._missing(f"`{call.subsystem}` has no output `{call.output}`", call.place)

    def _missing(self, message: str, place: Place) -> Fault:
        """Return the fault of a name that leads nowhere: said already where a part of the project was left out."""
        return Fault(faults.NAME, message, place, repeats=self.project.partial)

    def factor(self, node: Scaled) -> Dimension:
        """Return the dimension of the constant in front of a signal. Raises Fault."""
        return as_dimension(infer(constant(node), self.values))

    # --- checks -------------------------------------------------------------------------------------------

    def check(self, name: str, found: Faults) -> None:
        """Note everything wrong with the dimensions in the equation of a signal."""
        with found.noted(loop=self.loop.name):
            self.unit(name)
        for check in self._checks(self.loop.signals[name].expression):
            with found.noted(loop=self.loop.name):
                check()

    def _checks(self, node: SignalExpression) -> Iterator[Callable[[], object]]:
        """Give the checks of an expression, the inner ones first."""
        if isinstance(node, Scaled):
            yield partial(self.factor, node)
            yield from self._checks(node.operand)
        elif isinstance(node, Sum):
            for term in node.terms:
                yield from self._checks(term)
            yield partial(self._sum, node)
        elif isinstance(node, Call):
            for name, argument in node.arguments.items():
                yield from self._checks(argument)
                yield partial(self._argument, node, name, argument)

    def _sum(self, node: Sum) -> None:
        first = self.unit_of(node)
        for term in node.terms:
            unit = self.unit_of(term)
            if first is not None and unit is not None:
                problem = misfit(unit, first)
                if problem is not None:
                    message = f"a signal in `{unit.symbol}` is added to one in `{first.symbol}`: {problem}"
                    raise Fault(faults.DIMENSION, message, term.place)

    def _argument(self, call: Call, name: str, argument: SignalExpression) -> None:
        subsystem = self.project.subsystems.get(call.subsystem)
        port = subsystem.inputs.get(name) if subsystem is not None else None
        if port is None:
            raise self._missing(f"`{call.subsystem}` has no input `{name}`", call.place)
        unit = self.unit_of(argument)
        problem = None if unit is None else misfit(unit, port.unit)
        if unit is not None and problem is not None:
            raise Fault(
                faults.DIMENSION,
                f"`{call.subsystem}` takes `{port.unit.symbol}` and is given `{unit.symbol}`: {problem}",
                argument.place,
            )


def misfit(unit: Unit, other: Unit) -> str | None:
    """Say why two signals may not be joined, or return None: between units of one dimension they are converted."""
    if unit.dimension != other.dimension:
        return "these are not of one dimension"
    if unit.angle != other.angle and (unit.frequency or other.frequency) and unit.si_factor != other.si_factor:
        return "one counts turns or angles, the other only 1/time, so that a factor of 2π is in doubt: write rad/s"
    return None


def constant(node: Scaled) -> Value:
    """Return the constant in front of a signal as a value."""
    return Value(node.factor, "the factor of a signal", node.place)


def _givers(project: Project) -> Iterator[Giver]:
    for subsystem in project.subsystems.values():
        yield from subsystem.inputs.values()
        yield from subsystem.outputs.values()
    for loop in project.loops.values():
        yield from loop.inputs.values()


def signal_unit(project: Project, loop: str, signal: str, known: Values | None = None) -> Unit:
    """Return the unit in which an input or signal of a loop is declared. Raises Fault.

    known: the values of the parameters, if they are at hand.
    """
    return LoopSignals(project, project.loops[loop], known or values(project)).unit(signal)


def span(project: Project, loop: str, signal: str, known: Values) -> fmpq | None:
    """Return high minus low of the span of the port that gives a signal, coherent SI; None without a span.

    Raises Fault.
    """
    return LoopSignals(project, project.loops[loop], known).span(signal)


def owner(project: Project, port: Port) -> str | None:
    """Return the subsystem that a port belongs to, whose parameters its ranges may read."""
    names = (
        subsystem.name
        for subsystem in project.subsystems.values()
        if any(port is own for own in (*subsystem.inputs.values(), *subsystem.outputs.values()))
    )
    return next(names, None)


__all__ = ["LoopSignals", "calls", "constant", "misfit", "owner", "signal_unit", "span"]
