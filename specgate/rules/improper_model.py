"""A model differentiates without any lag: its numerator is of higher degree than its denominator.

Such a subsystem is accepted with a warning, since the loop around it may still be proper; no real device passes
every frequency with a growing gain. A response that is improper as a whole has no step response: that is an error,
and the requirements on it are open. Put it right by giving the derivative the lag that it has (`derivative_lag`, a
further pole).
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import fmpq_poly

from specgate.analysis.analyses import Missing
from specgate.project.blocks import transfer
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "improper-model"


def check(facts: Facts) -> Iterator[Finding]:
    """Report improper subsystems, then improper responses."""
    for name, subsystem in facts.project.subsystems.items():
        channels = transfer(facts.project, name, facts.analyses.nominal.values)
        worst = max((_excess(one.numerator, one.denominator) for one in channels.values()), default=0)
        if worst > 0:
            yield Finding(
                rule=NAME,
                level=Level.WARNING,
                message=(
                    f"{name} differentiates without a lag: its numerator is {worst} degree{'s' if worst > 1 else ''} "
                    "above its denominator; give the derivative the lag that it has"
                ),
                place=subsystem.model_place,
                subsystem=name,
            )
    for loop in facts.analyses.loops.values():
        for response_name, response in loop.responses.items():
            if response.improper and isinstance(response.subject, Missing):
                yield Finding(
                    rule=NAME,
                    level=Level.ERROR,
                    message=f"{loop.loop.name}.{response_name} has no step response: {response.subject.reason}",
                    place=response.response.place,
                    loop=loop.loop.name,
                    response=response_name,
                )


def _excess(numerator: fmpq_poly, denominator: fmpq_poly) -> int:
    return int(numerator.degree() - denominator.degree())


RULE = Rule(NAME, "Improper model", "error for a response, warning for a subsystem", check, __doc__)
