"""What on one side is the same thing on the other: requirements by id or content, criteria by what they are about.

All pairing is symmetric in the two sides, so that the differences from new to old mirror those from old to new.
"""

from __future__ import annotations

from collections.abc import Callable, Hashable, Iterable, Mapping, Sequence
from typing import TypeVar

from specgate.review.types import CriterionReview, RequirementReview
from specgate.revisions.said import limit
from specgate.terms.records import record

T = TypeVar("T")
Requirements = Mapping[str, RequirementReview]


@record
class Paired:
    """A requirement on both sides (`old` and `new` ids), or on one of them."""

    old: str | None
    new: str | None

    @property
    def id(self) -> str:
        """The id to speak of it by: the new one where there is one."""
        return self.new or self.old or ""


def requirements(old: Requirements, new: Requirements) -> tuple[Paired, ...]:
    """Pair requirements by id; one that came and one that went are one renamed if nothing else in them differs."""
    gone = [name for name in old if name not in new]
    come = [name for name in new if name not in old]
    renamed = _renamed(_by_content(old, gone), _by_content(new, come))
    targets = set(renamed.values())
    found = [Paired(name, name) for name in old if name in new]
    found += [Paired(name, renamed.get(name)) for name in gone]
    found += [Paired(None, name) for name in come if name not in targets]
    return tuple(sorted(found, key=lambda pair: (pair.id, pair.old or "")))


def _renamed(gone: Mapping[Hashable, list[str]], come: Mapping[Hashable, list[str]]) -> dict[str, str]:
    """Return old ids to new ones where a content went once and came once."""
    return {gone[key][0]: come[key][0] for key in gone if key in come and len(gone[key]) == len(come[key]) == 1}


def _by_content(every: Requirements, names: Iterable[str]) -> dict[Hashable, list[str]]:
    found: dict[Hashable, list[str]] = {}
    for name in names:
        found.setdefault(_content(every[name]), []).append(name)
    return found


def _content(one: RequirementReview) -> Hashable:
    criteria = tuple((each.measure, each.on, _frozen(each.arguments), limit(each.limit)) for each in one.criteria)
    return " ".join(one.text.split()), one.title, one.decided_by, criteria


def _frozen(arguments: Mapping[str, str]) -> tuple[tuple[str, str], ...]:
    return tuple(sorted(arguments.items()))


CriterionPair = tuple[CriterionReview | None, CriterionReview | None]
_KEYS: tuple[Callable[[CriterionReview], Hashable], ...] = (
    lambda one: (one.measure, one.on, _frozen(one.arguments), limit(one.limit)),
    lambda one: (one.measure, one.on, _frozen(one.arguments)),
    lambda one: (one.measure, one.on),
    lambda one: one.measure,
)


def criteria(old: Sequence[CriterionReview], new: Sequence[CriterionReview]) -> tuple[CriterionPair, ...]:
    """Pair the criteria of a requirement: by all that they say, then by ever less of it, each time in their order."""
    rest, others = list(old), list(new)
    found: list[CriterionPair] = []
    for key in _KEYS:
        pairs, rest, others = _paired(rest, others, key)
        found += pairs
    found += [(one, None) for one in rest] + [(None, one) for one in others]
    return tuple(found)


def _paired(old: list[T], new: list[T], key: Callable[[T], Hashable]) -> tuple[list[tuple[T, T]], list[T], list[T]]:
    waiting: dict[Hashable, list[int]] = {}
    for number, one in enumerate(new):
        waiting.setdefault(key(one), []).append(number)
    pairs: list[tuple[T, T]] = []
    rest: list[T] = []
    for one in old:
        group = waiting.get(key(one))
        if group:
            pairs.append((one, new[group.pop(0)]))
        else:
            rest.append(one)
    left = sorted(number for group in waiting.values() for number in group)
    return pairs, rest, [new[number] for number in left]
