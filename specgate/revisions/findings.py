"""Which findings are new and which are gone, wherever in the files they stand and whatever numbers they print.

A finding is the same on both sides if it is by the same rule, of the same level, on the same subject, and says the same
but for its numbers. Where it only restates a verdict, a standing or a reading, its words follow the reading: there it
is the same as soon as rule, level and subject are.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Hashable

from specgate.review.types import FindingReview

RESTATING = frozenset(
    {
        *("requirement-not-met", "requirement-open", "measure-does-not-exist", "not-answered-yet"),
        *("approximation-out-of-range", "approximation-inconclusive", "claim-disagrees-with-formula"),
        *("fragile-result", "range-exceeded", "range-undecided", "value-without-source"),
    }
)
"""Rules that say a verdict, a standing or a reading in other words."""
_NUMBER = re.compile(r"(?<![\w.-])[-+−]?\d+(?:[.,]\d+)*(?:[eE][-+]?\d+)?(?![\w-])")


def new_and_gone(
    old: tuple[FindingReview, ...], new: tuple[FindingReview, ...]
) -> tuple[tuple[FindingReview, ...], tuple[FindingReview, ...]]:
    """Return the findings of the new side that the old one has not, and the other way round."""
    before, after = list(old), list(new)
    for key in (_whole, _without_numbers, _subject_alone):
        before, after = _left(before, after, key)
    return tuple(sorted(after, key=_order)), tuple(sorted(before, key=_order))


def _left(
    old: list[FindingReview], new: list[FindingReview], key: Callable[[FindingReview], Hashable]
) -> tuple[list[FindingReview], list[FindingReview]]:
    """Return what is left of both sides once each finding has met one of the same key."""
    return _unmet(old, new, key), _unmet(new, old, key)


def _unmet(
    these: list[FindingReview], those: list[FindingReview], key: Callable[[FindingReview], Hashable]
) -> list[FindingReview]:
    there: dict[Hashable, int] = {}
    for one in those:
        there[key(one)] = there.get(key(one), 0) + 1
    left: list[FindingReview] = []
    for one in these:
        met = there.get(key(one), 0)
        if met:
            there[key(one)] = met - 1
        else:
            left.append(one)
    return left


def _subject(one: FindingReview) -> tuple[Hashable, ...]:
    return one.rule, one.level, one.requirement, one.loop, one.response, one.subsystem


def _whole(one: FindingReview) -> Hashable:
    return (*_subject(one), one.message)


def _without_numbers(one: FindingReview) -> Hashable:
    return (*_subject(one), _NUMBER.sub("#", one.message))


def _subject_alone(one: FindingReview) -> Hashable:
    return _subject(one) if one.rule in RESTATING else (*_subject(one), one.message)


_LEVELS = {"error": 0, "warning": 1, "note": 2}


def _order(one: FindingReview) -> tuple[int, str, int, int, str, str]:
    where = one.location
    return _LEVELS.get(one.level, 3), where.path, where.line, where.column, one.rule, one.message
