"""What rules for the crossover frequency have in common: a limit that comes from the plant, and the crossover in it."""

from __future__ import annotations

from collections.abc import Callable

from flint import fmpq

from specgate.approximations.approximation import Approximation, Condition, Found
from specgate.approximations.conditions import at_least, at_most, words
from specgate.approximations.figures import product, quotient
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE
from specgate.approximations.opened import OpenedLoop
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.terms.records import record

SOURCE = "S. Skogestad, I. Postlethwaite, Multivariable Feedback Control, 2nd edition, 2005, chapter 5"


@record
class Limit:
    """A limit of the crossover frequency.

    rate: what sets it (rad/s), None where the loop has nothing of the kind. factor: times the rate it is the limit.
    above: the crossover has to lie above it. what: what sets it, in words.
    """

    rate: Callable[[OpenedLoop], Answer | None]
    factor: fmpq
    above: bool
    what: str


def row(name: str, title: str, formula: str, in_rates: str, limit: Limit, text: str | None) -> Approximation:
    """Return a rule. in_rates: the crossover frequency in units of what sets the limit, in words."""

    def evaluate(opened: OpenedLoop, _: Arguments) -> Answer:
        rate = limit.rate(opened)
        return (
            Answer.nothing(f"there is no {limit.what}")
            if rate is None
            else product(rate, Answer.of_exact(limit.factor))
        )

    def exists(opened: OpenedLoop, _: Arguments, __: fmpq | None) -> Found:
        found = limit.rate(opened) is not None
        return words("there is one" if found else "there is none", found)

    def within(opened: OpenedLoop, arguments: Arguments, threshold: fmpq | None) -> Found:
        rate = limit.rate(opened)
        crossover = None if opened.loop is None else opened.loop.crossover_frequency(arguments.over)
        if rate is None or crossover is None or crossover.absent is not None or threshold is None:
            return words("no crossover, or nothing that limits it", False)
        found = quotient(crossover, rate)
        return at_least(found, threshold) if limit.above else at_most(found, threshold)

    return Approximation(
        name=name,
        title=title,
        estimates=("crossover_frequency",),
        formula=formula,
        source=SOURCE,
        conditions=(
            CLOSED_LOOP_STABLE,
            Condition(key="cause", name=f"a {limit.what} in L", source="derived", required="there is one", find=exists),
            Condition(
                key="crossover",
                name=in_rates,
                source=SOURCE,
                required=">= {threshold}" if limit.above else "<= {threshold}",
                find=within,
                threshold=limit.factor,
                tighter="larger" if limit.above else "smaller",
            ),
        ),
        evaluate=evaluate,
        accuracy=lambda _, __: None,
        text=text or "",
    )
