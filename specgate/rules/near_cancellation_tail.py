"""A pole and a zero lie beside each other, and the tail that they leave rules the settling time.

They look as if they cancelled (within a fifth of each other), and on a plot of poles and zeros they do. What is left is
a tail that decays as slowly as the pole, and it is greater than the band: the response settles when the tail does, not
when the rest does. The greatest value of the tail and both settling times are proved. The finding is a note: the
verdict counts the tail. It says why the loop is so much slower than its dominant poles, and what dropping the couple
would have promised. The approximation near_cancellation asks for the same tail to stay inside the band.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.resting import resting
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.verdicts import Level

NAME = "near-cancellation-tail"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every settling time that is ruled by a pole and a zero beside each other."""
    for one in resting(facts.assessments, "near_cancellation"):
        assumed = one.assumption
        yield Finding(
            NAME,
            Level.NOTE,
            f"{one.requirement}: in {assumed.on}, {assumed.words}",
            one.place,
            requirement=one.requirement,
        )


RULE = Rule(NAME, "Tail of a near cancellation", "note", check, __doc__)
