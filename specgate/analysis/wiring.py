"""Which subsystems a loop is wired from."""

from __future__ import annotations

from collections.abc import Iterator

from specgate.project.types import Call, Loop, Project, Scaled, SignalExpression, Sum


def subsystems_of(project: Project, loop: Loop) -> tuple[str, ...]:
    """Return the names of the subsystems that a loop applies, in the order of the files."""
    used = {name for signal in loop.signals.values() for name in _applied(signal.expression)}
    return tuple(name for name in project.subsystems if name in used)


def _applied(expression: SignalExpression) -> Iterator[str]:
    waiting = [expression]
    while waiting:
        node = waiting.pop()
        if isinstance(node, Call):
            yield node.subsystem
            waiting.extend(node.arguments.values())
        elif isinstance(node, Scaled):
            waiting.append(node.operand)
        elif isinstance(node, Sum):
            waiting.extend(node.terms)
