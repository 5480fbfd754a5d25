"""Ranges of the linear models: each signal that a verdict rests on, what it may do and does, the broken ones first."""

from __future__ import annotations

from specgate.report import anchors, digits
from specgate.report.parts import shown
from specgate.report.words import CONDITIONS, Status, amount, listed, with_unit
from specgate.review.types import Amount, AssumptionReview, RequirementReview, Review
from specgate.terms.records import record

ROWS_AT_MOST = 200
"""Rows of the printed table; the attached result has all."""


@record
class Range:
    """One range in one response. goes: the proved peak, or why there is none. requirements: those that rest on it."""

    signal: str
    port: str
    response: str
    plot: str
    what: str
    allowed: str
    goes: str
    worded: bool
    """Whether `goes` is a reason, which needs the width of a sentence."""
    size: str
    state: Status
    requirements: tuple[tuple[str, str], ...]
    """Ids and their places in the matrix."""


def ranges(review: Review) -> tuple[Range, ...]:
    """Return every range once, with the requirements that rest on it."""
    resting: dict[AssumptionReview, list[str]] = {}
    for name, requirement in review.requirements.items():
        for one in of_signals(requirement):
            resting.setdefault(one, []).append(name)
    rows = [_range(one, names) for one, names in resting.items()]
    return tuple(sorted(rows, key=lambda row: row.state.weight))


def of_signals(requirement: RequirementReview) -> tuple[AssumptionReview, ...]:
    """Return the ranges of signals that a requirement rests on."""
    return tuple(one for one in requirement.assumptions if isinstance(one, AssumptionReview))


def _range(one: AssumptionReview, names: list[str]) -> Range:
    peak = None if one.peak is None else shown.result(one.peak)
    loop, _, response = one.response.partition(".")
    return Range(
        signal=one.signal or port(one),
        port=port(one) if one.signal else "",
        response=one.response,
        plot=anchors.plot(loop, response),
        what=_what(one),
        allowed="none" if (one.allowed.value or 0.0) < 0 else amount(one.allowed),
        goes="" if peak is None else one.reason or "none" if peak.value == "none" else peak.whole,
        worded=peak is not None and peak.value == "none",
        size=largest(one),
        state=CONDITIONS[one.holds],
        requirements=tuple((name, anchors.row(name)) for name in names),
    )


def port(one: AssumptionReview) -> str:
    """Return the port of a range: `the input of hoist_drive`."""
    name = one.side if one.port == one.side else f"{one.side} {one.port}"
    return f"the {name} of {one.subsystem}"


def _what(one: AssumptionReview) -> str:
    """Return a range with the value that it is counted from: `-10 V … 10 V, from 0 V`."""
    ends = f"{one.low.as_written or amount(one.low)} … {one.high.as_written or amount(one.high)}"
    return f"rate {ends}" if one.kind == "rate_range" else f"{ends}, from {amount(one.rest)}"


def largest(one: AssumptionReview) -> str:
    """Return the largest size of the input, never more than what holds."""
    if one.largest_size is not None and one.largest_size.value is not None:
        return with_unit(digits.rounded_down(one.largest_size.value), one.largest_size.unit)
    return "" if one.largest_factor is None else f"{digits.rounded_down(one.largest_factor)} times"


def beyond(requirement: RequirementReview) -> str:
    """Say which signals leave their range, for page one; nothing where all are inside."""
    broken = [one for one in of_signals(requirement) if one.holds is False]
    if not broken:
        return ""
    first = broken[0]
    if (first.allowed.value or 0.0) < 0:
        words = f"{first.signal or port(first)} rests at {amount(first.rest)}, outside its range"
    elif first.peak is None or first.peak.value is None:
        words = f"{first.signal or port(first)} leaves its range: {first.reason or 'no peak'}"
    else:
        goes = amount(Amount(float(first.peak.value), first.peak.unit or "1"))
        kept = _kept([one for one in broken if one.response == first.response])
        words = f"{first.signal or port(first)} goes {goes} where its range leaves {amount(first.allowed)}"
        words += f" (kept up to {kept})" if kept else ""
    named = dict.fromkeys(one.signal or port(one) for one in broken)
    others = [name for name in named if name != (first.signal or port(first))]
    return f"{words}; {listed(others)} too" if others else words


def _kept(broken: list[AssumptionReview]) -> str:
    """Return the largest size of one input that keeps every one of its broken ranges; nothing where there is none."""
    if any(one.largest_factor is None for one in broken):
        return ""
    return largest(min(broken, key=lambda one: one.largest_factor or 0.0))


def undecided(requirement: RequirementReview) -> str:
    """Say which signal is not shown to stay inside its range; nothing where that is shown of all."""
    named = dict.fromkeys(one.signal or port(one) for one in of_signals(requirement) if one.holds is None)
    if not named:
        return ""
    return f"whether {listed(named)} {'stays' if len(named) == 1 else 'stay'} in range is not decided"
