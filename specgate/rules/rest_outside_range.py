"""A signal is outside the range of its linear model before anything happens.

The value that a loop states under `rest` (0 where it states none) is not in the `linear_range` of the port that carries
the signal, so that no size of an input could keep the range. Either the value at rest is missing or wrong, or the
range is counted from another point than the signal. Everything on a response that moves the signal has the standing out
of range. The finding restates it: it is an error where `gate: hold_on` names out_of_range and a requirement rests on
it, else a warning.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.compliance.assumptions import Assumption
from specgate.compliance.range_words import range_words, rest_words, signal_words
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level, Standing

NAME = "rest-outside-range"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every signal that some response moves and whose value at rest is outside its range, once for each loop."""
    for loop, analysis in facts.analyses.loops.items():
        outside: dict[tuple[str, str], Assumption] = {}
        for response in analysis.responses:
            for one in facts.assumptions.of_response(loop, response):
                if one.at_rest:
                    outside.setdefault((one.ranged.kind, one.ranged.probe), one)
        for one in outside.values():
            yield _finding(facts, loop, one)


def _finding(facts: Facts, loop: str, one: Assumption) -> Finding:
    ranged, rest = one.ranged, facts.project.loops[loop].rest
    resting = [
        assessment
        for assessment in facts.assessments.values()
        for criterion in assessment.criteria
        if criterion.criterion.subject.loop == loop
        and any(other.at_rest and other.ranged.probe == ranged.probe for other in criterion.assumptions)
    ]
    levels = [facts.restating(Standing.OUT_OF_RANGE, assessment) for assessment in resting]
    level = Level.ERROR if Level.ERROR in levels else Level.WARNING
    stated = rest.get(ranged.signal or "")
    where = (
        f"`{ranged.signal}` under `rest` of {loop}" if ranged.signal else "the signal a name and its value under `rest`"
    )
    mend = f"mend {where}" if stated else f"state {where}" if ranged.signal else f"give {where}"
    return Finding(
        NAME,
        level,
        f"{loop}: {signal_words(ranged)} rests at {rest_words(ranged)}, outside its {range_words(ranged)}: {mend}, or "
        "mend the range",
        ranged.ends[0].place if stated is None else stated.place,
        loop=loop,
        subsystem=ranged.subsystem,
        related=() if stated is None else (Related(ranged.ends[0].place, f"the {ranged.kind}"),),
        restates=True,
    )


RULE = Rule(NAME, "Rest outside the range of a signal", "error or warning (restates the standing)", check, __doc__)
