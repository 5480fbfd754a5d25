"""A continuous block stands for a sampled one, and does not lag as much as that does.

A subsystem says with `stands_for` that its model in s represents a controller that is sampled, with a hold and a
computation time. Hold and computation lag by half a period and the computation time, exactly. At the gain crossover of
the loop through the block the stand-in may lag 5 degrees less or more (common practice), and the sampling frequency has
to be at least 10 times the crossover frequency (20 times where the hold is left out altogether, by
fast_sampling_as_continuous). Else the standing of what rests on it is out of range; it is inconclusive where no
crossover tells. Put it right with a dead time in the block, or with a `sampled` model, which is computed as it is. The
finding restates the standing.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Trilean

NAME = "stand-in-out-of-range"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that rests on a block that does not stand for what it says."""
    for one in resting(facts.assessments, "stands_for"):
        assumed = one.assumption
        if assumed.holds is not Trilean.YES:
            what = "does not stand for" if assumed.holds is Trilean.NO else "is not shown to stand for"
            yield Finding(
                NAME,
                facts.restating(assumed.standing, one.assessment),
                f"{one.requirement} rests in {assumed.on} on a block that {what} what it says: {assumed.words}",
                one.place,
                requirement=one.requirement,
                subsystem=assumed.subsystem,
                related=(Related(assumed.place, f"`stands_for` of {assumed.subsystem}"),),
                restates=True,
            )


RULE = Rule(NAME, "Stand-in out of range", "error, warning or note (restates the standing)", check, __doc__)
