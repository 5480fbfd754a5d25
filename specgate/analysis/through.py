"""The loop through one applied block: opened at its input, whether a break is declared there or not."""

from __future__ import annotations

from dataclasses import replace

from flint import fmpq

from specgate.analysis.analyse import break_analysis
from specgate.analysis.analyses import LoopAnalysis
from specgate.approximations.opened import OpenedLoop
from specgate.measures.subjects import BreakSubject
from specgate.project.types import Break
from specgate.sampled.solution import SampledSolution
from specgate.systems.blocks import LinearForm, SignalRef, Wiring
from specgate.systems.delayed import solved
from specgate.systems.opening import Cut

_ONE_INPUT = 1


def through(loop: LoopAnalysis, subsystem: str) -> OpenedLoop | None:
    """Return the loop opened at the input of the first use of a subsystem; None where that is not answered.

    A subsystem with several inputs has no one place to open the loop at, a sampled loop no L in s.
    """
    solution = loop.solution
    if isinstance(solution, SampledSolution) or solution.algebraic_loop is not None:
        return None
    instance = next((one for one in solution.wiring.instances if one.block.name == subsystem), None)
    if instance is None or len(instance.block.inputs) != _ONE_INPUT:
        return None
    name = f"the input of {instance.name}"
    found = break_analysis(
        Break(name, name, loop.loop.place), Cut(), solved(_named(solution.wiring, instance.name, name)), None
    )
    return OpenedLoop(name, found.subject) if isinstance(found.subject, BreakSubject) else None


def _named(wiring: Wiring, instance: str, name: str) -> Wiring:
    """Return a wiring in which what feeds the only input of a block is a signal of its own."""
    fed = next(one for one in wiring.instances if one.name == instance)
    ((port, argument),) = fed.arguments.items()
    named = replace(fed, arguments={port: LinearForm(((fmpq(1), SignalRef(name)),))})
    return Wiring(
        wiring.inputs,
        tuple(named if one is fed else one for one in wiring.instances),
        {**wiring.signals, name: argument},
    )
