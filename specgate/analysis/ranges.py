"""Ranges of signals: where a loop uses a port that has one, and how far each response takes the signal from rest.

The loop is wired a second time with a signal of its own for every such port: the sum that feeds an input, the output of
a block. Such a signal feeds nothing, so that nothing else changes, and whatever kind of loop or input has a response
at a signal has one there. A range of an input port holds for what the block is applied to, one of an output port for
what the block gives, before anything is added to it.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from functools import cached_property
from typing import Literal

from flint import fmpq

from specgate.analysis.analyse import loop_analysis
from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.analysis.driven import UNASKED
from specgate.analysis.rest import Rest
from specgate.analysis.wiring import subsystems_of
from specgate.project.instances import Use, Uses
from specgate.project.instantiate import InstantiatedLoop, instantiate
from specgate.project.parameters import Values, evaluate
from specgate.project.temperatures import absolute
from specgate.project.types import Call, Loop, Port, Project, Response, Signal, SignalExpression, Value
from specgate.terms.dimensions import TIME
from specgate.terms.records import record
from specgate.terms.unit import Unit

Kind = Literal["linear_range", "rate_range"]
Side = Literal["input", "output"]

_SECOND = Unit("s", fmpq(1), 0, TIME)


@record
class Ranged:
    """A range of a port where a loop uses its subsystem; coherent SI, temperatures from the zero of the port's unit.

    instance: the applied subsystem. signal: the input or signal of the loop that the port carries, None for a sum or an
    output without a name. unit: of what is limited. rest: its value before the input starts. probe: the name that the
    port's signal has in the second wiring.
    """

    kind: Kind
    instance: str
    subsystem: str
    side: Side
    port: Port
    signal: str | None
    unit: Unit
    rest: fmpq
    low: fmpq
    high: fmpq
    ends: tuple[Value, Value]
    probe: str

    @property
    def allowed(self) -> fmpq:
        """How far it may go from rest either way; negative where rest itself is outside the range."""
        return min(self.high - self.rest, self.rest - self.low)


class Ranges:
    """The ranges in one loop, for one set of parameter values. Nothing is computed before it is asked for."""

    def __init__(self, project: Project, loop: Loop, known: Values) -> None:
        self._project, self._loop, self._known = project, loop, known

    @cached_property
    def all(self) -> tuple[Ranged, ...]:
        """Every range, in the order of the files."""
        return tuple(one for probe in self._probes for one in self._of_port(probe))

    def response(self, response: Response, ranged: Ranged) -> ResponseAnalysis:
        """Return the response at a port to what drives a declared one; responses that are driven alike share it."""
        return self._solved.responses[_key(response, ranged.probe)]

    # --- the second wiring ------------------------------------------------------------------------------------

    @cached_property
    def _probes(self) -> tuple[_Probe, ...]:
        if not any(_ranges(port) for name in subsystems_of(self._project, self._loop) for port in self._ports(name)):
            return ()
        return tuple(
            probe
            for instance, use in _instances(self._project, Uses(self._loop, self._known))
            for probe in self._of_use(instance, use.call)
        )

    def _ports(self, subsystem: str) -> Iterator[Port]:
        declared = self._project.subsystems[subsystem]
        yield from (*declared.inputs.values(), *declared.outputs.values())

    def _of_use(self, instance: str, call: Call) -> Iterator[_Probe]:
        subsystem = self._project.subsystems[call.subsystem]
        for name, port in subsystem.inputs.items():
            if _ranges(port):
                yield _Probe(instance, call.subsystem, "input", port, call.arguments[name])
        for name, port in subsystem.outputs.items():
            if _ranges(port):
                yield _Probe(instance, call.subsystem, "output", port, replace(call, output=name))

    @cached_property
    def _wired(self) -> Loop:
        """The loop with the signals of the ports, and no responses but at them."""
        loop = self._loop
        probes = {one.name: Signal(one.name, one.expression, one.name, loop.place) for one in self._probes}
        responses = {_key(one, name): _at(one, name) for one in loop.responses.values() for name in probes}
        return replace(loop, signals={**loop.signals, **probes}, responses=responses, breaks={})

    @cached_property
    def _built(self) -> InstantiatedLoop:
        loop, project = self._wired, self._project
        used = {name: project.subsystems[name] for name in subsystems_of(project, loop)}
        return instantiate(replace(project, loops={loop.name: loop}, subsystems=used), self._known)[loop.name]

    @cached_property
    def _solved(self) -> LoopAnalysis:
        return loop_analysis(self._project, self._wired, self._built, self._known)

    @cached_property
    def _rest(self) -> Rest:
        return Rest(self._built, (*self._loop.inputs, *self._loop.signals))

    # --- ranges -----------------------------------------------------------------------------------------------

    def _of_port(self, probe: _Probe) -> Iterator[Ranged]:
        port, rest = probe.port, self._rest
        for kind, ends in _ranges(port).items():
            linear = kind == "linear_range"
            low, high = (self._end(value, port, probe.subsystem, linear=linear) for value in ends)
            yield Ranged(
                kind,
                probe.instance,
                probe.subsystem,
                probe.side,
                port,
                rest.carried(probe.name),
                port.unit if linear else port.unit / _SECOND,
                rest.at(probe.name, port.unit) if linear else fmpq(0),
                low,
                high,
                ends,
                probe.name,
            )

    def _end(self, value: Value, port: Port, subsystem: str, *, linear: bool) -> fmpq:
        if linear:
            return absolute(value, port.unit, self._known, subsystem)
        return evaluate(value, self._known, subsystem)


@record
class _Probe:
    """A port with a range, and the expression of what it carries."""

    instance: str
    subsystem: str
    side: Side
    port: Port
    expression: SignalExpression

    @property
    def name(self) -> str:
        """What the port's signal is called in a sentence; no signal of a project has such a name."""
        port = self.side if self.port.name == self.side else f"{self.side} {self.port.name}"
        return f"the {port} of {self.instance}"


def _ranges(port: Port) -> Mapping[Kind, tuple[Value, Value]]:
    stated: tuple[tuple[Kind, tuple[Value, Value] | None], ...] = (
        ("linear_range", port.linear_range),
        ("rate_range", port.rate_range),
    )
    return {kind: ends for kind, ends in stated if ends is not None}


def _instances(project: Project, uses: Uses) -> Iterator[tuple[str, Use]]:
    """Give the applied subsystems by name, in the order of the project: a second one is `name (2)`."""
    classes = list(uses.classes().values())
    for name in project.subsystems:
        applied = [members[0] for members in classes if members[0].call.subsystem == name]
        for count, use in enumerate(applied, 1):
            yield name if count == 1 else f"{name} ({count})", use


def _at(response: Response, signal: str) -> Response:
    """Return the same response at another signal, with no error to be measured."""
    return replace(response, to=signal, reference=UNASKED)


def _key(response: Response, probe: str) -> str:
    """Name what drives a response and where it is looked at; the same for responses that are driven alike."""
    driven = [
        (
            one.source,
            one.kind,
            [(key, value.as_written) for key, value in one.quantities.items()],
            list(one.options.items()),
        )
        for one in response.excitations
    ]
    return f"{driven} at {probe}"
