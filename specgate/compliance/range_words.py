"""Ranges of signals in the words of a message: which signal, how far it goes, how far it may."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq

from specgate.analysis.ranges import Ranged
from specgate.approximations.figures import smallest
from specgate.compliance.assumptions import Assumption
from specgate.compliance.readings import Reading
from specgate.compliance.wording import apart, figure, number, with_unit
from specgate.response.answers import Answer
from specgate.terms.enclosed import ends, rounded, to_float
from specgate.terms.verdicts import Trilean

_BITS = 128
_FEW = 4


def signal_words(ranged: Ranged) -> str:
    """Name a signal: `command (the input of hoist_drive)`, or the port alone where the loop has no name for it."""
    return ranged.probe if ranged.signal is None else f"{ranged.signal} ({ranged.probe})"


def range_words(ranged: Ranged) -> str:
    """Write a range as the file has it: `linear_range [-10 V, 10 V]`."""
    low, high = ranged.ends
    return f"{ranged.kind} [{low.as_written}, {high.as_written}]"


def rest_words(ranged: Ranged) -> str:
    """Write the value of a signal at rest, in the unit of its port."""
    return figure(Reading.once(Answer.of_exact(ranged.rest)).in_unit(ranged.unit), ranged.unit)


def excess_words(assumption: Assumption) -> str:
    """Say how far a signal goes and what its range leaves."""
    ranged = assumption.ranged
    if assumption.at_rest:
        return f"{signal_words(ranged)} rests at {rest_words(ranged)}, outside its {range_words(ranged)}"
    if assumption.decision.holds is Trilean.UNKNOWN:
        stays = f"whether {signal_words(ranged)} stays in its {range_words(ranged)} is not decided"
        return f"{stays}: {assumption.decision.reason}"
    absent = assumption.peak.settled.absent
    if absent is not None:
        return f"{signal_words(ranged)} leaves its {range_words(ranged)}: {absent.reason}"
    reached, allowed = apart([one.in_unit(ranged.unit) for one in (assumption.peak, assumption.allowed)], ranged.unit)
    if ranged.kind == "rate_range":
        return f"{signal_words(ranged)} changes by {reached}, and its {range_words(ranged)} leaves {allowed}"
    gone = f"{signal_words(ranged)} goes {reached} either way from rest at {rest_words(ranged)}"
    return f"{gone}, and its {range_words(ranged)} leaves {allowed}"


def standing_words(assumptions: Sequence[Assumption]) -> str | None:
    """Say why a standing is not sound because of the model; None where every range is kept."""
    for wanted in (Trilean.NO, Trilean.UNKNOWN):
        for one in assumptions:
            if one.decision.holds is wanted:
                return excess_words(one)
    return None


def largest_words(assumptions: Sequence[Assumption]) -> str | None:
    """Say up to which size of the input all of some assumptions on one response hold; None where none does."""
    if any(one.factor is None for one in assumptions):
        return None
    sizes = [found for one in assumptions if (found := one.largest_size) is not None]
    asked = assumptions[0].asked
    if sizes and asked is not None:
        most, unit = smallest([answer for answer, _ in sizes]), sizes[0][1]
        largest = with_unit(number(at_most(most, _FEW)), unit)
        return f"the verdict would hold up to {largest} ({figure(*asked)} is declared)"
    factors = [one.factor.settled for one in assumptions if one.factor is not None]
    return f"the verdict would hold up to {number(at_most(smallest(factors), _FEW))} times this input"


def at_most(answer: Answer, digits: int) -> float:
    """Return a positive number rounded down, so that what is printed is no more than what holds."""
    low = answer.exact if answer.exact is not None else ends(answer.enclose(_BITS))[0]
    return to_float(rounded(max(low, fmpq(0)), "down", digits))
