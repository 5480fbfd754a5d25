"""Loops: subsystems wired together, what drives them, where they are opened."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.project.types.values import Value
from specgate.terms.expressions import Expression
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.units import Unit


@record
class SignalName:
    """A loop input or signal inside a signal expression."""

    name: str
    place: Place


@record
class Call:
    """A subsystem applied to arguments, by position (one input) or by name; `output` where it has several."""

    subsystem: str
    arguments: Mapping[str, SignalExpression]
    output: str
    place: Place


@record
class Scaled:
    """A constant times a signal expression."""

    factor: Expression
    operand: SignalExpression
    place: Place


@record
class Sum:
    """A sum; signs are in the terms (Scaled by -1)."""

    terms: tuple[SignalExpression, ...]
    place: Place


SignalExpression = SignalName | Call | Scaled | Sum


@record
class LoopInput:
    """An outside input of a loop."""

    name: str
    unit: Unit
    place: Place


@record
class Signal:
    """A named signal with its equation."""

    name: str
    expression: SignalExpression
    as_written: str
    place: Place


@record
class Break:
    """Where the loop is opened: at a signal for all its users, or at one use with named loops open."""

    name: str
    at: str
    place: Place
    into: str | None = None
    with_open: tuple[str, ...] = ()


@record
class Excitation:
    """One input that is driven: kind of the input and its quantities (`size`, `slope`, `duration` …)."""

    source: str
    kind: str
    quantities: Mapping[str, Value]
    options: Mapping[str, str]
    place: Place


@record
class Response:
    """A response of a loop: what drives it, which signal is looked at, what the error is measured from."""

    name: str
    excitations: tuple[Excitation, ...]
    to: str
    place: Place
    reference: str | None = None
    title: str | None = None


@record
class Loop:
    """Subsystems wired together."""

    name: str
    inputs: Mapping[str, LoopInput]
    signals: Mapping[str, Signal]
    responses: Mapping[str, Response]
    breaks: Mapping[str, Break]
    rest: Mapping[str, Value]
    place: Place
    title: str | None = None
