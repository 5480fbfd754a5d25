"""A slow pole looks like an integrator, and is none.

A requirement counts on integral action (a final value, a steady-state error, the type or an error constant of a loop),
the loop through a block has no pole at the origin, exactly, and the block has a real pole at least 100 times slower
than the gain crossover of that loop. Over the time in which the loop acts the pole cannot be told from an integrator; a
lasting error stays all the same, of one part in 1 + L(0). The finding is a note: the verdict counts the pole as it is.
It names the pole, the crossover and the gain of the loop at zero frequency. Put it right with integral action in the
controller, or by asking for an error that may last.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level

NAME = "quasi-integrator"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that counts on an integrator where there is a slow pole."""
    for one in resting(facts.assessments, "quasi_integrator"):
        assumed = one.assumption
        yield Finding(
            NAME,
            Level.NOTE,
            f"{one.requirement}: in {assumed.on}, {assumed.words}",
            one.place,
            requirement=one.requirement,
            subsystem=assumed.subsystem,
            related=(Related(assumed.place, f"the model of {assumed.subsystem}"),),
        )


RULE = Rule(NAME, "Integrator that is none", "note", check, __doc__)
