"""A model holds a fraction that looks like a dead time written by hand.

An all-pass pair, numerator and denominator that are each other with s turned to -s, has the magnitude of a dead time
and nearly its phase at low frequency; a Pade approximant with a numerator of lower degree likewise. The pair is
recognised exactly. The finding names the dead time that it stands for and up to which frequency its phase is that of
one to within 5 degrees. It is a note where the gain crossover of the loop lies below that. Above it, and for what
happens at the start of a response (initial value, undershoot, rise and delay time), where a fraction moves at once and
a dead time does not, nobody can tell what the verdict is worth: its standing is inconclusive. Put it right with
`dead_time: …`, which is computed as it is, or leave it where the plant does have a zero to the right.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import Resting, resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level, Standing, Trilean

NAME = "dead-time-as-fraction"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that rests on a dead time that is written as a fraction."""
    for one in resting(facts.assessments, "dead_time"):
        assumed = one.assumption
        beyond = assumed.holds is Trilean.NO
        yield Finding(
            NAME,
            _level(facts, one) if beyond else Level.NOTE,
            f"{one.requirement}: in {assumed.on}, {assumed.words}: write `dead_time` if it is one",
            one.place,
            requirement=one.requirement,
            subsystem=assumed.subsystem,
            related=(Related(assumed.place, f"the model of {assumed.subsystem}"),),
            restates=beyond,
        )


def _level(facts: Facts, one: Resting) -> Level:
    return facts.restating(Standing.INCONCLUSIVE, one.assessment)


RULE = Rule(NAME, "Dead time written as a fraction", "note; restates the standing beyond its range", check, __doc__)
