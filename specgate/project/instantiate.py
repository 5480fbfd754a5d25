"""A project with values for its parameters: what later stages ask for."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.project.blocks import build, transfer
from specgate.project.parameters import Values, depends_on_pi, evaluate, values
from specgate.project.signals import signal_unit, span
from specgate.project.temperatures import absolute
from specgate.project.types import Project
from specgate.project.wiring import InstantiatedLoop, wire
from specgate.terms.unit import PI, PRECISE_PI

__all__ = [
    "PI",
    "PRECISE_PI",
    "InstantiatedLoop",
    "Values",
    "absolute",
    "depends_on_pi",
    "evaluate",
    "instantiate",
    "signal_unit",
    "span",
    "transfer",
    "values",
]


def instantiate(project: Project, values: Values) -> Mapping[str, InstantiatedLoop]:
    """Return every loop for given values of the parameters, in coherent SI.

    A question with a yes or no for an answer is decided again with `values(project, pi=PRECISE_PI)` where a loop
    `depends_on_pi`. Raises Fault for a project that `dimensions.check` refuses, or values that break it.
    """
    blocks = {name: build(subsystem, values) for name, subsystem in project.subsystems.items()}
    return {name: wire(project, loop, blocks, values) for name, loop in project.loops.items()}
