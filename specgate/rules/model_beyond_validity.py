"""What decides a requirement lies above the frequency up to which a model holds.

A subsystem states with `valid_to` up to which frequency its model was identified or derived. The gain crossovers of a
break and the place where its margin is read, the bandwidth, the resonance peak and the modes of a response that count
(2 % of the change or more), and the frequency that a requirement asks about have to lie below it: above, the model says
nothing, and the standing of what rests on it is out of range. Put it right with a model that holds further and its
source, or with a slower loop. The finding restates the standing: it is an error where `gate: hold_on` names
out_of_range (inconclusive, where it cannot be told), else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Trilean

NAME = "model-beyond-validity"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that rests on a model above its limit."""
    for one in resting(facts.assessments, "valid_to"):
        assumed = one.assumption
        if assumed.holds is not Trilean.YES:
            yield Finding(
                NAME,
                facts.restating(assumed.standing, one.assessment),
                f"{one.requirement} rests on a model beyond its range in {assumed.on}: {assumed.words}",
                one.place,
                requirement=one.requirement,
                subsystem=assumed.subsystem,
                related=(Related(assumed.place, f"`valid_to` of {assumed.subsystem}"),),
                restates=True,
            )


RULE = Rule(NAME, "Model beyond its validity", "error, warning or note (restates the standing)", check, __doc__)
