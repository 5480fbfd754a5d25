"""The shape of a row of the catalogue of approximations."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any, Literal

from flint import arb, fmpq

from specgate.approximations.features import Features
from specgate.measures.measure import Arguments
from specgate.response.answers import Absent, Answer
from specgate.terms.records import record
from specgate.terms.verdicts import Trilean


@record
class Found:
    """What a condition met: a ball (refined enough to print), a whole number or words; and whether it holds."""

    value: arb | int | str | None
    holds: Trilean


@record
class Condition:
    """One condition of an approximation's range.

    key: short name by which a project's policy may change `threshold`. name, required: words in which
    `{threshold}` may stand (see `named`, `asked`). tighter: the direction in which a threshold gets stricter.
    source: published (author, year, place), "common practice" or "derived". concerns: the measures for whose
    estimate it is needed; all if empty.
    """

    key: str
    name: str
    source: str
    required: str
    find: Callable[[Any, Arguments, fmpq | None], Found]
    threshold: fmpq | None = None
    tighter: Literal["larger", "smaller"] = "larger"
    concerns: tuple[str, ...] = ()

    def named(self, threshold: fmpq | None) -> str:
        """Return the condition in words, with the threshold in force."""
        return self.name.format(threshold=_plain(threshold))

    def asked(self, threshold: fmpq | None) -> str:
        """Return what is required, with the threshold in force."""
        return self.required.format(threshold=_plain(threshold))

    def stricter(self, threshold: fmpq) -> bool:
        """Whether a threshold tightens the row's own (the same counts)."""
        if self.threshold is None:
            return False
        return threshold >= self.threshold if self.tighter == "larger" else threshold <= self.threshold


def _plain(threshold: fmpq | None) -> str:
    """Return a threshold as a short decimal."""
    return "" if threshold is None else f"{int(threshold.p) / int(threshold.q):.6g}"


@record
class Accuracy:
    """Stated range of error = formula / true - 1 inside the conditions; `text` says it in words."""

    lower: fmpq
    upper: fmpq
    text: str


Reduction = Callable[[Features, Arguments], Features | Absent]
"""The response with something dropped, for what follows in a chain to be read from; or why there is none."""


@record
class Variant:
    """One of several published formulas for the same thing.

    for_: what it is for, in words of its own (its place in the list that `specgate explain` prints).
    """

    name: str
    for_: str
    formula: str
    source: str
    conditions: tuple[Condition, ...]
    evaluate: Callable[[Any, Arguments], Answer]
    accuracy: Callable[[Any, Arguments], Accuracy | None]


@record
class Approximation:
    """One row: formula, range, stated accuracy, source.

    Its functions take what the measure is read from, as approximations look at it (see `viewed`): a response, a loop
    opened at a break, or a whole loop.
    estimates: names of the measures it estimates; `Arguments.measure` says which one is asked for (the first, if
    it is not set). evaluate: formula on this response, in the unit in which the measure is read (SI, ratios plain);
    absent where the features it needs do not exist.
    accuracy: None where nothing is stated for these arguments.
    premises: names of approximations whose conditions belong to this one (see `table.conditions`).
    text: the user's text (the module's docstring).
    variants: where there are several formulas, all of them, the one that is offered first; `variant` names
    the one whose formula the row carries (see `taken_as`).
    reduce: set where the approximation drops a part of the response, so that others can follow it in a chain.
    inputs: kinds of input besides a single step for whose responses it is derived. late: for a single step through a
    dead time (see `late.derived_for`).
    """

    name: str
    title: str
    estimates: tuple[str, ...]
    formula: str
    source: str
    conditions: tuple[Condition, ...]
    evaluate: Callable[[Any, Arguments], Answer]
    accuracy: Callable[[Any, Arguments], Accuracy | None]
    text: str
    premises: tuple[str, ...] = ()
    alternatives: tuple[str, ...] = ()
    always_safe: Literal["over", "under"] | None = None
    """Set where the formula is a proved bound on one side of the truth inside its conditions."""
    variants: tuple[Variant, ...] = ()
    variant: str | None = None
    reduce: Reduction | None = None
    inputs: tuple[str, ...] = ()
    late: bool = False

    def taken_as(self, variant: str) -> Approximation:
        """Return the row with the formula of one of its variants. Raises KeyError for a name that none has."""
        chosen = next((one for one in self.variants if one.name == variant), None)
        if chosen is None:
            raise KeyError(variant)
        return replace(
            self,
            formula=chosen.formula,
            source=chosen.source,
            conditions=chosen.conditions,
            evaluate=chosen.evaluate,
            accuracy=chosen.accuracy,
            variant=chosen.name,
        )
