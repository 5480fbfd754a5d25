"""A response takes a signal out of the range in which the model is linear.

A subsystem states for a port between which values (`linear_range`) or rates (`rate_range`) its model holds. The signal
there is its value at rest and what the response adds, for either sign of the input. Where that leaves the range, the
response is one of a model that is not the design any more: no verdict on it is sound, and the standing of what rests
on it is out of range. The message names the proved peak and the size of the input up to which the range is kept. Put it
right with a smaller size, with a wider range and its source, or by showing the requirement in another way. The
finding restates the standing: it is an error where `gate: hold_on` names out_of_range, else a warning; for a
response that no requirement is on it is a note.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specgate.compliance.assumptions import Assumption
from specgate.compliance.range_words import excess_words, largest_words, signal_words
from specgate.compliance.resting import asked, by_response
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding, Related
from specgate.terms.verdicts import Level, Standing, Trilean

NAME = "range-exceeded"


def check(facts: Facts) -> Iterator[Finding]:
    """Report every requirement that rests on a signal beyond its range, then responses that nothing rests on."""
    for name, assessment in facts.assessments.items():
        for criterion in by_response(assessment):
            broken = _broken(criterion.assumptions)
            if broken:
                yield Finding(
                    NAME,
                    facts.restating(Standing.OUT_OF_RANGE, assessment),
                    f"{name} rests on a linear model beyond its range: {_words(facts, broken)}",
                    criterion.criterion.place,
                    requirement=name,
                    related=_places(broken),
                    restates=True,
                )
    wanted = asked(facts.assessments)
    for loop, analysis in facts.analyses.loops.items():
        same: dict[tuple[str, ...], list[list[Assumption]]] = {}
        for response in analysis.responses:
            broken = [] if (loop, response) in wanted else _broken(facts.assumptions.of_response(loop, response))
            if broken:
                same.setdefault(tuple(map(_named, broken)), []).append(broken)
        for group in same.values():
            yield _unasked(facts, loop, group)


def _unasked(facts: Facts, loop: str, group: list[list[Assumption]]) -> Finding:
    """Say of responses that no requirement is on that they leave the same ranges: the first in full."""
    first, *others = group
    likewise = f"; likewise in {', '.join(broken[0].on for broken in others)}" if others else ""
    return Finding(
        NAME,
        Level.NOTE,
        f"the linear model is beyond its range, and no requirement is on it: {_words(facts, first)}{likewise}",
        first[0].response.place,
        loop=loop,
        response=None if others else first[0].response.name,
        related=_places(first),
    )


def _broken(assumptions: Sequence[Assumption]) -> list[Assumption]:
    return [one for one in assumptions if one.decision.holds is Trilean.NO and not one.at_rest]


def _words(facts: Facts, broken: list[Assumption]) -> str:
    first, *others = broken
    more = f"; {', '.join(dict.fromkeys(map(_named, others)))} too" if others else ""
    largest = largest_words(broken)
    return f"in {first.on} {excess_words(first)}{more}{f'; {largest}' if largest else ''}"


def _named(one: Assumption) -> str:
    signal = signal_words(one.ranged)
    return f"the rate of {signal}" if one.ranged.kind == "rate_range" else signal


def _places(broken: list[Assumption]) -> tuple[Related, ...]:
    return tuple(Related(one.ranged.ends[0].place, f"the {one.ranged.kind} of {one.ranged.probe}") for one in broken)


RULE = Rule(NAME, "Range of a signal exceeded", "error, warning or note (restates the standing)", check, __doc__)
