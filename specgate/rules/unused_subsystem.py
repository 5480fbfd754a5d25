"""A subsystem is in no loop: no verdict says anything about it.

A block that stands beside the loops looks covered to a reader and is not. Put it right by wiring it into a loop, or
by taking it out of the specification.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "unused-subsystem"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every subsystem that no loop uses."""
    used = {name for loop in facts.analyses.loops.values() for name in loop.subsystems}
    for name, subsystem in facts.project.subsystems.items():
        if name not in used:
            yield Finding(
                rule=NAME,
                level=Level.WARNING,
                message=f"no loop uses the subsystem {name}: wire it into a loop, or take it out",
                place=subsystem.place,
                subsystem=name,
            )


RULE = Rule(NAME, "Unused subsystem", "warning", check, __doc__)
