"""A response hides a mode that decays more slowly than any that it shows.

A zero cancels it exactly, so that the settling time that is asked for is one without it. As soon as a tolerance moves
the pole off the zero, or the other way round, a tail comes back that is slower than all the rest, and a small amplitude
is enough to leave a band of 2 %. The finding is a note and leaves the standing as it is: the verdict holds for the
model as given. It names both decay rates and, where the mode is real and the band in per cent of the change, how far
apart pole and zero may come before the tail fills the band. Put it right by judging tolerances, or by a design that
does not rest on cancelling a slow pole. Every hidden mode, slow or not, is told of each response by hidden-mode.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "hidden-slow-mode"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement on a response that hides a mode slower than all it shows."""
    for one in resting(facts.assessments, "hidden_slow_mode"):
        assumed = one.assumption
        yield Finding(
            NAME,
            Level.NOTE,
            f"{one.requirement}: in {assumed.on}, {assumed.words}",
            one.place,
            requirement=one.requirement,
        )


RULE = Rule(NAME, "Hidden slow mode", "note", check, __doc__)
