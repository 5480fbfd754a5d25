"""The texts on every measure, approximation and rule that a Review uses, so that it explains itself."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from specgate.approximations import text as approximation_text
from specgate.approximations.table import APPROXIMATIONS, BY_RULE, LATER, chain
from specgate.intake.slugs import SLUGS
from specgate.measures import text as measure_text
from specgate.measures.table import MEASURES
from specgate.review.types import DefinitionReview, FindingReview, LoopReview, MeasureResult, RequirementReview
from specgate.rules.table import RULES


def definitions(
    loops: Mapping[str, LoopReview], requirements: Mapping[str, RequirementReview], findings: Iterable[FindingReview]
) -> Mapping[str, DefinitionReview]:
    """Return the texts by name: measures, then approximations, then rules, each in order of first use."""
    criteria = [one for requirement in requirements.values() for one in requirement.criteria]
    measures = [*(one.measure for one in criteria), *(one.measure for one in _reported(loops))]
    named = [name for one in criteria for name in one.basis.chain]
    named += [one.basis.instead.name for one in criteria if one.basis.instead is not None]
    return {
        **{name: _measure(name) for name in dict.fromkeys(measures)},
        **{name: _approximation(name) for name in dict.fromkeys(_with_premises(named))},
        **{name: _rule(name) for name in dict.fromkeys(one.rule for one in findings) if name in RULES},
    }


def all_definitions() -> Mapping[str, DefinitionReview]:
    """Return the texts on everything that has a name: measures, approximations, rules, faults of the files."""
    return {
        **{name: _measure(name) for name in MEASURES},
        **{name: _approximation(name) for name in (*APPROXIMATIONS, *LATER, *BY_RULE)},
        **{name: _rule(name) for name in RULES},
        **{row.name: DefinitionReview("fault of the files", row.title, row.text) for row in SLUGS.values()},
    }


def _reported(loops: Mapping[str, LoopReview]) -> Iterator[MeasureResult]:
    for loop in loops.values():
        yield from loop.measures
        for response in loop.responses.values():
            yield from response.measures
        for one in loop.breaks.values():
            yield from one.measures


def _with_premises(names: Iterable[str]) -> Iterator[str]:
    for name in names:
        if name in APPROXIMATIONS:
            yield from (row.name for row in reversed(chain(name)))
        elif name in LATER or name in BY_RULE:
            yield name


def _measure(name: str) -> DefinitionReview:
    said = measure_text.describe(name)
    return DefinitionReview("measure", said.title, said.text, said.source, _summary(said.text))


def _approximation(name: str) -> DefinitionReview:
    said = approximation_text.describe(name)
    return DefinitionReview("approximation", said.title, said.text, said.source or None, _summary(said.text))


def _rule(name: str) -> DefinitionReview:
    rule = RULES[name]
    return DefinitionReview("rule", rule.title, rule.text.strip())


def _summary(text: str) -> str:
    """Return what something is (its first paragraph), its formula, and when it has no value."""
    first, *others = text.split("\n\n")
    return " ".join([first, *(part for part in others if part.startswith(("Formula:", "No value:")))])
