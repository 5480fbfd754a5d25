"""A value that a verdict rests on does not say where it comes from.

Parameters, and coefficients with a unit that stand in a model, of the subsystems in a loop that a criterion is
about, may name their `source` (a test report, a data sheet). Those that do not are named in one note for each file.
Put it right by writing `{value: 85 ms, source: "GH-TR-031, table 5"}` where the number stands.
"""

from __future__ import annotations

from collections.abc import Iterator

from specgate.analysis.reads import literals, parameters_read
from specgate.project.parameters import parameters
from specgate.rules.rule import Facts, Rule
from specgate.terms.findings import Finding
from specgate.terms.places import Place
from specgate.terms.verdicts import Level

NAME = "value-without-source"
_NAMED = 5


def check(facts: Facts) -> Iterator[Finding]:
    """Report the values without a source, one note for each file."""
    by_file: dict[str, list[tuple[Place, str]]] = {}
    for place, name in dict.fromkeys(_unsourced(facts)):
        by_file.setdefault(place.path, []).append((place, name))
    for found in by_file.values():
        named = ", ".join(dict.fromkeys(name for _, name in found[:_NAMED]))
        more = f" and {len(found) - _NAMED} more" if len(found) > _NAMED else ""
        values = (
            "1 value in this file that a verdict rests on has"
            if len(found) == 1
            else (f"{len(found)} values in this file that a verdict rests on have")
        )
        yield Finding(
            rule=NAME,
            level=Level.NOTE,
            message=f"{values} no source ({named}{more}): write {{value: …, source: …}}",
            place=min(place for place, _ in found),
        )


def _unsourced(facts: Facts) -> Iterator[tuple[Place, str]]:
    every = parameters(facts.project)
    for name in _used(facts):
        subsystem = facts.project.subsystems[name]
        for qualified in parameters_read(subsystem, facts.analyses.nominal.values):
            parameter = every[qualified][0]
            if not parameter.formula and parameter.value.source is None:
                yield parameter.place, qualified
        for value in literals(subsystem):
            if value.source is None:
                yield value.place, f"`{value.as_written}` of {name}"


def _used(facts: Facts) -> tuple[str, ...]:
    """Return the subsystems in the loops that criteria are about, in the order of the files."""
    loops = {one.criterion.subject.loop for judged in facts.assessments.values() for one in judged.criteria}
    used = {name for loop in loops for name in facts.analyses.loops[loop].subsystems}
    return tuple(name for name in facts.project.subsystems if name in used)


RULE = Rule(NAME, "Value without a source", "note", check, __doc__)
