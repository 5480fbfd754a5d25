"""Blocks and signal expressions: what a loop is wired from. Plain exact values, coherent SI."""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq, fmpq_poly

from specgate.terms.records import record


@record
class Block:
    """A subsystem with its model: outputs = numerators / denominator * inputs, as written, never reduced.

    numerators: {(output, input): polynomial}; a missing pair is zero. One denominator is one set of modes.
    dead_time: by which every output is late (s, not negative).
    """

    name: str
    inputs: tuple[str, ...]
    outputs: tuple[str, ...]
    numerators: Mapping[tuple[str, str], fmpq_poly]
    denominator: fmpq_poly
    dead_time: fmpq = fmpq(0)


@record
class SignalRef:
    """A loop input or signal, by name."""

    name: str


@record
class OutputRef:
    """One output of an instance: `plant(duty=d, load=i).voltage`."""

    instance: str
    output: str


@record
class LinearForm:
    """A sum of constant times reference; the coefficients are exact."""

    terms: tuple[tuple[fmpq, SignalRef | OutputRef], ...]


@record
class Instance:
    """A block applied to arguments (one linear form per input of the block)."""

    name: str
    block: Block
    arguments: Mapping[str, LinearForm]


@record
class Wiring:
    """A loop: its inputs, the applied blocks and the equations of its signals."""

    inputs: tuple[str, ...]
    instances: tuple[Instance, ...]
    signals: Mapping[str, LinearForm]
