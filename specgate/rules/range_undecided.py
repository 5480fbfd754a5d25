"""Whether a signal stays in the range of its linear model is not decided.

The range is stated, a requirement is on the response, and the greatest distance that the signal goes from rest was
not found: its extreme was not searched to an end, an ideal derivative leads to it, or a mode that does not decay is
hidden on the way to it. The verdict stands on a range that nobody has shown to be kept, so its standing is
inconclusive. Mend what the message names, or show the range by test. The finding restates the standing: it is an error
where `gate: hold_on` names inconclusive, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.range_words import range_words, signal_words
from specgate.compliance.resting import by_response
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Standing, Trilean

NAME = "range-undecided"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every range that a requirement rests on and that is not decided."""
    for name, assessment in facts.assessments.items():
        for criterion in by_response(assessment):
            for one in criterion.assumptions:
                if one.decision.holds is Trilean.UNKNOWN:
                    ranged = one.ranged
                    yield Finding(
                        NAME,
                        facts.restating(Standing.INCONCLUSIVE, assessment),
                        f"{name}: whether {signal_words(ranged)} stays in its {range_words(ranged)} in {one.on} is not "
                        f"decided: {one.decision.reason}",
                        criterion.criterion.place,
                        requirement=name,
                        related=(Related(ranged.ends[0].place, f"the {ranged.kind} of {ranged.probe}"),),
                        restates=True,
                    )


RULE = Rule(NAME, "Range of a signal undecided", "error, warning or note (restates the standing)", check, __doc__)
