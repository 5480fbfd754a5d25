"""Delay margin from the phase that is left at the crossover: phase margin over crossover frequency, in rad and rad/s.

A dead time T turns L by w T of lag and leaves its magnitude alone, so that it first brings L to -1 at a frequency with
|L| = 1: the delay margin is the least of lag over frequency at all of these. With one gain crossover that is its phase
margin over its frequency. With several it need not be the crossover of least phase margin: one with 30 degrees left at
10 rad/s stands 0.052 s, less than the 0.17 s of one with 10 degrees at 1 rad/s. Where the gain does not fall below one
at high frequency, any dead time destabilises the loop, whatever its phase margin.

Exact inside its conditions. A sampled loop has no delay margin of this kind: a dead time there is no factor of L.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq

from specgate.approximations.approximation import Accuracy, Approximation, Condition, Found, Variant
from specgate.approximations.conditions import count
from specgate.approximations.figures import SHOWN, quotient, smallest
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE, CONTINUOUS, FALLS_OFF
from specgate.approximations.opened import OpenedLoop, lag
from specgate.frequency.questions import Crossing, Range
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_NONE = "the gain of the open loop is nowhere one"


def _finite(opened: OpenedLoop, over: Range | None) -> Sequence[Crossing]:
    """Return the gain crossings that a dead time turns: not those at zero or infinite frequency."""
    crossings = opened.crossings(over)
    return [one for one in crossings if one.frequency.absent is None and one.frequency.exact != 0]


def _over_every(opened: OpenedLoop, arguments: Arguments) -> Answer:
    times = [quotient(lag(one), one.frequency) for one in _finite(opened, arguments.over)]
    return smallest(times) if times else Answer.nothing(_NONE, infinite=True)


def _over_the_least(opened: OpenedLoop, arguments: Arguments) -> Answer:
    crossings = _finite(opened, arguments.over)
    if not crossings:
        return Answer.nothing(_NONE, infinite=True)
    nearest = min(crossings, key=lambda one: lag(one).enclose(SHOWN).mid().fmpq())
    return quotient(lag(nearest), nearest.frequency)


def _number(opened: OpenedLoop, arguments: Arguments, _: fmpq | None) -> Found:
    number = len(_finite(opened, arguments.over))
    return count(number, number <= 1)


_ONE = Condition(
    key="crossovers",
    name="gain crossovers of the open loop",
    source="derived",
    required="one at most",
    find=_number,
)
_EXACT = Accuracy(fmpq(0), fmpq(0), "exact")
_CONDITIONS = (CLOSED_LOOP_STABLE, CONTINUOUS, FALLS_OFF)

VARIANTS = (
    Variant(
        name="every_crossover",
        for_="any number of gain crossovers",
        formula="least lag over frequency of all gain crossovers",
        source="derived",
        conditions=_CONDITIONS,
        evaluate=_over_every,
        accuracy=lambda _, __: _EXACT,
    ),
    Variant(
        name="one_crossover",
        for_="a single gain crossover",
        formula="phase margin/wc",
        source="K. J. Astrom, R. M. Murray, Feedback Systems, chapter 9",
        conditions=(*_CONDITIONS, _ONE),
        evaluate=_over_the_least,
        accuracy=lambda _, __: _EXACT,
    ),
)

ROW = Approximation(
    name="delay_margin_from_phase_margin",
    title="Delay margin from phase margin and crossover frequency",
    estimates=("delay_margin",),
    formula="",
    source="",
    conditions=(),
    evaluate=VARIANTS[0].evaluate,
    accuracy=VARIANTS[0].accuracy,
    text=__doc__,
    variants=VARIANTS,
).taken_as("every_crossover")
