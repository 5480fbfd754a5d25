"""Signals at ports: what feeds an input of an applied block, and what its output gives, before anything is added.

In a rational loop they are forms of what its solution knows, so that each response there costs one channel. Elsewhere
the loop is wired a second time with a signal of its own for every such port. Such a signal feeds nothing, so that
nothing else changes, and whatever kind of loop or input has a response at a signal has one there.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from functools import cached_property
from typing import Literal, Protocol

from flint import fmpq

from specgate.analysis.analyse import loop_analysis
from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.analysis.driven import UNASKED
from specgate.analysis.responses import Unnamed, response_at
from specgate.analysis.wiring import subsystems_of
from specgate.project.instances import Use, Uses
from specgate.project.instantiate import InstantiatedLoop, instantiate
from specgate.project.parameters import Values
from specgate.project.types import Loop, Port, Project, Response, Signal, SignalExpression
from specgate.systems.blocks import LinearForm, OutputRef
from specgate.systems.solution import LoopSolution
from specgate.terms.records import record

Side = Literal["input", "output"]


@record
class Probe:
    """A port of an applied subsystem."""

    instance: str
    subsystem: str
    side: Side
    port: Port

    @property
    def name(self) -> str:
        """What the port's signal is called in a sentence; no signal of a project has such a name."""
        port = self.side if self.port.name == self.side else f"{self.side} {self.port.name}"
        return f"the {port} of {self.instance}"


class Probed(Protocol):
    """A loop with the signals at some of its ports."""

    @property
    def built(self) -> InstantiatedLoop:
        """The loop with values, its signals among its wiring or not."""

    @property
    def forms(self) -> Mapping[str, LinearForm]:
        """What the signals at the ports are made of, by the names of the probes."""

    def response(self, response: Response, probe: Probe) -> ResponseAnalysis:
        """Return the response at a port to what drives a declared one."""


def probed(project: Project, analysis: LoopAnalysis, known: Values, probes: Sequence[Probe]) -> Probed:
    """Return a solved loop with the signals at ports."""
    built = analysis.built
    if isinstance(analysis.solution, LoopSolution) and built.unsupported is None and built.sampled is None:
        return _Solved(built, analysis.solution, known, probes)
    return _Rewired(project, analysis.loop, known, probes)


class _Solved:
    """Forms of what a solution knows."""

    def __init__(self, built: InstantiatedLoop, solution: LoopSolution, known: Values, probes: Sequence[Probe]) -> None:
        self.built = built
        self._solution, self._known, self._probes = solution, known, probes

    @cached_property
    def forms(self) -> Mapping[str, LinearForm]:
        """What the signals at the ports are made of."""
        instances = {one.name: one for one in self.built.wiring.instances}
        return {
            one.name: instances[one.instance].arguments[one.port.name]
            if one.side == "input"
            else LinearForm(((fmpq(1), OutputRef(one.instance, one.port.name)),))
            for one in self._probes
        }

    def response(self, response: Response, probe: Probe) -> ResponseAnalysis:
        """Return the response at a port."""
        at = Unnamed(self.forms[probe.name], probe.port.unit)
        return response_at(self.built.signals, _at(response, probe), at, self._solution, self._known)


class _Rewired:
    """The loop wired and solved a second time."""

    def __init__(self, project: Project, loop: Loop, known: Values, probes: Sequence[Probe]) -> None:
        self._project, self._loop, self._known, self._probes = project, loop, known, probes

    @cached_property
    def forms(self) -> Mapping[str, LinearForm]:
        """What the signals at the ports are made of."""
        return {one.name: self.built.wiring.signals[one.name] for one in self._probes}

    def response(self, response: Response, probe: Probe) -> ResponseAnalysis:
        """Return the response at a port; responses that are driven alike share it."""
        return self._solved.responses[key(response, probe)]

    @cached_property
    def _wired(self) -> Loop:
        """The loop with the signals of the ports, and no responses but at them."""
        loop, calls = self._loop, dict(_instances(self._project, Uses(self._loop, self._known)))
        signals = {
            one.name: Signal(one.name, _expression(one, calls[one.instance]), one.name, loop.place)
            for one in self._probes
        }
        responses = {
            key(response, probe): _at(response, probe) for response in loop.responses.values() for probe in self._probes
        }
        return replace(loop, signals={**loop.signals, **signals}, responses=responses, breaks={})

    @cached_property
    def built(self) -> InstantiatedLoop:
        """The loop with values, the signals of the ports among its own."""
        loop, project = self._wired, self._project
        used = {name: project.subsystems[name] for name in subsystems_of(project, loop)}
        return instantiate(replace(project, loops={loop.name: loop}, subsystems=used), self._known)[loop.name]

    @cached_property
    def _solved(self) -> LoopAnalysis:
        return loop_analysis(self._project, self._wired, self.built, self._known)


def _expression(probe: Probe, use: Use) -> SignalExpression:
    """Return what a port carries."""
    return use.call.arguments[probe.port.name] if probe.side == "input" else replace(use.call, output=probe.port.name)


def _instances(project: Project, uses: Uses) -> Iterator[tuple[str, Use]]:
    """Give the applied subsystems by name, in the order of the project: a second one is `name (2)`."""
    classes = list(uses.classes().values())
    for name in project.subsystems:
        applied = [members[0] for members in classes if members[0].call.subsystem == name]
        for count, use in enumerate(applied, 1):
            yield name if count == 1 else f"{name} ({count})", use


def _at(response: Response, probe: Probe) -> Response:
    """Return the same response at a port, with no error to be measured."""
    return replace(response, to=probe.name, reference=UNASKED)


def key(response: Response, probe: Probe) -> str:
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
    return f"{driven} at {probe.name}"
