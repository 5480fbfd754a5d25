"""Budgets: whether what is given to each share, and what each was found to use, together keep the limit.

Every share is an interval on the scale of the limit; a limit `within d of v` and a value x found for it are the
intervals of half-width d and |x - v| about v, for the sign of a disturbance is not promised. Intervals add, multiply,
and have a greatest and a smallest as interval arithmetic says. Root-sum-square (ECSS-E-ST-60-10C, budgets of errors):
means add linearly, deviations of one group add linearly, groups add by the root of the sum of squares, each deviation
taken at the level of the whole. A sum of rationals is rational, and the square of such a root is: equality is decided.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

from flint import fmpq

from specgate.approximations.figures import combined, negative, product, root, smallest, total
from specgate.compliance.compare import sign
from specgate.compliance.scales import Bounds, difference, distance, times
from specgate.project.types import Budget, Share
from specgate.response.answers import Answer
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Trilean

_ZERO = Answer.of_exact(fmpq(0))
_HALF = fmpq(1, 2)


@record
class Entry:
    """What one share brings in: an interval on the scale of the limit, the factor applied."""

    share: Share
    bounds: Bounds


class Undecided(Exception):
    """Why a budget cannot be added up."""


@record
class Sum:
    """What shares make together. parts: how much of it each one is (of root-sum-square: of the variance), by id."""

    bounds: Bounds
    parts: Mapping[str, Answer]


def added(budget: Budget, entries: Sequence[Entry]) -> Sum:
    """Put shares together. Raises Undecided."""
    if budget.combine == "root_sum_square":
        return _root_sum_square(budget, entries)
    least, most = _side(entries, "least"), _side(entries, "most")
    of = _OF[budget.combine]
    if budget.combine == "product":
        _no_negative(entries)
    bounds = Bounds(None if least is None else of(least), None if most is None else of(most))
    whole = bounds.most or bounds.least
    counted = budget.combine == "sum" and whole is not None and whole.exact != 0
    used = most if bounds.most is not None else least
    parts = (
        {one.share.id: _ratio(part, whole) for one, part in zip(entries, used or [], strict=False)} if counted else {}
    )
    return Sum(bounds, parts)


def _side(entries: Sequence[Entry], side: str) -> list[Answer] | None:
    """Return the ends of all shares on one side; None where one has none."""
    found = [one.bounds.most if side == "most" else one.bounds.least for one in entries]
    return [end for end in found if end is not None] if None not in found else None


def _products(parts: Sequence[Answer]) -> Answer:
    whole = parts[0]
    for part in parts[1:]:
        whole = product(whole, part)
    return whole


def _greatest(parts: Sequence[Answer]) -> Answer:
    return negative(smallest([negative(part) for part in parts]))


_OF: Mapping[str, Callable[[Sequence[Answer]], Answer]] = {
    "sum": total,
    "maximum": _greatest,
    "minimum": smallest,
    "product": _products,
}


def _no_negative(entries: Sequence[Entry]) -> None:
    for one in entries:
        for end in (one.bounds.least, one.bounds.most):
            if end is not None and sign(end, fmpq(0)) == -1:
                raise Undecided(f"{one.share.id} may be negative, and shares that are multiplied may not")


def _root_sum_square(budget: Budget, entries: Sequence[Entry]) -> Sum:
    centres, linear, groups = _ZERO, _ZERO, dict[str, Answer]()
    members: dict[str, list[str]] = {}
    for number, one in enumerate(entries):
        centre, half = _about(one)
        centres = total([centres, centre])
        if one.share.mean:
            linear = total([linear, half])
            continue
        level = one.share.level
        if level is not None and budget.level is not None:
            half = times(budget.level / level, half)
        key = one.share.group or f"\0{number}"
        groups[key] = total([groups[key], half]) if key in groups else half
        members.setdefault(key, []).append(one.share.id)
    squares = {key: product(part, part) for key, part in groups.items()}
    variance = total(list(squares.values())) if squares else _ZERO
    spread = root(variance) if variance.exact != 0 else _ZERO
    parts = {
        name: _ratio(square, variance)
        for key, square in squares.items()
        for name in (members[key] if len(members[key]) == 1 else [" and ".join(members[key])])
        if variance.exact != 0
    }
    reach = total([linear, spread])
    return Sum(Bounds(difference(centres, reach), difference(centres, reach, -1)), parts)


def _about(one: Entry) -> tuple[Answer, Answer]:
    """Return the centre of a share and its half-width; a share with an upper end alone is a deviation about zero."""
    least, most = one.bounds.least, one.bounds.most
    if most is None:
        raise Undecided(f"{one.share.id} has no upper limit")
    if least is None:
        if sign(most, fmpq(0)) == -1:
            raise Undecided(f"{one.share.id} has a negative limit, which is no deviation")
        return _ZERO, most
    return times(_HALF, total([least, most])), times(_HALF, difference(most, least))


def _ratio(part: Answer, whole: Answer | None) -> Answer:
    assert whole is not None
    if part.exact is not None and whole.exact is not None:
        return Answer.of_exact(part.exact / whole.exact)
    return combined(lambda x, y: x / y, part, whole)


def scaled(bounds: Bounds, factor: fmpq) -> Bounds:
    """Return an interval times a factor; a negative one turns it round."""
    least = None if bounds.least is None else times(factor, bounds.least)
    most = None if bounds.most is None else times(factor, bounds.most)
    return Bounds(least, most) if factor > 0 else Bounds(most, least)


def found_within(value: Answer, limit: Bounds, deviation: bool) -> Bounds:
    """Return the interval that a value found for a share stands for.

    deviation: where the limit is one-sided, the value is a distance from zero.
    """
    if limit.least is None or limit.most is None:
        return Bounds(None, value) if deviation else Bounds(value, value)
    centre = times(_HALF, total([limit.least, limit.most]))
    off = distance(value, centre)
    return Bounds(difference(centre, off), difference(centre, off, -1))


def kept(whole: Bounds, limit: Bounds) -> tuple[Trilean, Answer]:
    """Return whether an interval keeps a limit, and what is left. Raises Undecided where a side is unknown."""
    left = []
    for name, end, bound, order in (("upper", whole.most, limit.most, 1), ("lower", whole.least, limit.least, -1)):
        if bound is None:
            continue
        if end is None:
            raise Undecided(f"not every share has {'an' if name == 'upper' else 'a'} {name} limit")
        left.append(difference(bound, end) if order == 1 else difference(end, bound))
    signs = [sign(one, fmpq(0)) for one in left]
    if any(one == -1 for one in signs):
        return Trilean.NO, smallest(left)
    return (Trilean.UNKNOWN if None in signs else Trilean.YES), smallest(left)


def tightened(limit: Bounds, reserve: Answer | None, fraction: fmpq | None) -> Bounds:
    """Return a limit from which a reserve is kept back: absolute, or a part of it (of half its width)."""
    if limit.least is not None and limit.most is not None:
        base = times(_HALF, difference(limit.most, limit.least))
        back = reserve or times(fraction or fmpq(0), base)
        return Bounds(difference(limit.least, back, -1), difference(limit.most, back))
    if limit.most is not None:
        back = reserve or times(fraction or fmpq(0), distance(limit.most, _ZERO))
        return Bounds(None, difference(limit.most, back))
    if limit.least is not None:
        back = reserve or times(fraction or fmpq(0), distance(limit.least, _ZERO))
        return Bounds(difference(limit.least, back, -1), None)
    return limit


def same_kind(one: Unit, other: Unit) -> bool:
    """Whether values in two units can be added."""
    kinds = (one.kind == "decibel", other.kind == "decibel")
    return one.dimension == other.dimension and one.angle == other.angle and kinds[0] is kinds[1]
