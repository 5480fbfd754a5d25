"""Ranges of signals: where a loop uses a port that has one, and how far each response takes the signal from rest.

A range of an input port holds for what the block is applied to, one of an output port for what the block gives, before
anything is added to it.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from functools import cached_property
from typing import Literal

from flint import fmpq

from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.analysis.probes import Probe, Probed, Side, key, probed
from specgate.analysis.rest import Rest
from specgate.project.parameters import Values, evaluate
from specgate.project.temperatures import absolute
from specgate.project.types import Port, Project, Response, Subsystem, Value
from specgate.terms.dimensions import TIME
from specgate.terms.records import record
from specgate.terms.unit import Unit

Kind = Literal["linear_range", "rate_range"]

_SECOND = Unit("s", fmpq(1), 0, TIME)


@record
class Ranged:
    """A range of a port where a loop uses its subsystem; coherent SI, temperatures from the zero of the port's unit.

    instance: the applied subsystem. signal: the input or signal of the loop that the port carries, None for a sum or an
    output without a name. unit: of what is limited. rest: its value before the input starts. probe: the
    name that the port's signal has in a sentence.
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

    def __init__(self, project: Project, analysis: LoopAnalysis, known: Values) -> None:
        self._project, self._analysis, self._known = project, analysis, known
        self._found: dict[str, ResponseAnalysis] = {}

    @cached_property
    def all(self) -> tuple[Ranged, ...]:
        """Every range, in the order of the files."""
        return tuple(one for probe in self._probes for one in self._of_port(probe))

    def response(self, response: Response, ranged: Ranged) -> ResponseAnalysis:
        """Return the response at a port to what drives a declared one; responses that are driven alike share it."""
        probe = self._by_name[ranged.probe]
        driven = key(response, probe)
        if driven not in self._found:
            self._found[driven] = self._probed.response(response, probe)
        return self._found[driven]

    @cached_property
    def _probes(self) -> tuple[Probe, ...]:
        return tuple(
            probe
            for instance, name in self._analysis.built.subsystems.items()
            for probe in _of_subsystem(instance, self._project.subsystems[name])
        )

    @cached_property
    def _by_name(self) -> Mapping[str, Probe]:
        return {probe.name: probe for probe in self._probes}

    @cached_property
    def _probed(self) -> Probed:
        return probed(self._project, self._analysis, self._known, self._probes)

    @cached_property
    def _rest(self) -> Rest:
        loop, found = self._analysis.loop, self._probed
        return Rest(found.built, (*loop.inputs, *loop.signals), found.forms)

    # --- ranges -----------------------------------------------------------------------------------------------

    def _of_port(self, probe: Probe) -> Iterator[Ranged]:
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


def _of_subsystem(instance: str, subsystem: Subsystem) -> Iterator[Probe]:
    sides: tuple[tuple[Side, Mapping[str, Port]], ...] = (("input", subsystem.inputs), ("output", subsystem.outputs))
    for side, ports in sides:
        yield from (Probe(instance, subsystem.name, side, port) for port in ports.values() if _ranges(port))


def _ranges(port: Port) -> Mapping[Kind, tuple[Value, Value]]:
    stated: tuple[tuple[Kind, tuple[Value, Value] | None], ...] = (
        ("linear_range", port.linear_range),
        ("rate_range", port.rate_range),
    )
    return {kind: ends for kind, ends in stated if ends is not None}
