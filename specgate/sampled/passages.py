"""Passages of the unit circle: whether a root passes it over an interval of delays, and when exactly.

Over a cell the angle h of a branch (`delay_cell`) is a continuous function of e. Where it runs one way, it passes as
many multiples of 2 pi as lie between its values at the ends. An interval Newton step with the slope over the interval
encloses when.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from flint import arb, fmpq

from specgate.sampled.delay_cell import Branch, Cell, Unclear
from specgate.sampled.delay_family import Family
from specgate.terms.precision import HIGHEST, working_precision


class TooNear(Exception):
    """A root is so near the circle at an end of an interval that it is not told on which side it is."""


@dataclass(frozen=True)
class Passage:
    """A root that passes the circle once for a delay of `whole` periods and an e in an interval.

    branch: the one that it is on, over the interval; None at z = -1. turns: which multiple of 2 pi the angle passes.
    """

    whole: int
    low: fmpq
    high: fmpq
    branch: Branch | None
    turns: int = 0

    def over(self, cell: Cell) -> tuple[arb, arb | None]:
        """Return what passes zero, and its slope, over a cell inside the interval. Raises Unclear."""
        if self.branch is None:
            end = cell.at_end(self.whole)
            return end.value, end.slope
        found = [one for one in cell.branches if one.x.overlaps(self.branch.x)]
        if len(found) != 1:
            raise Unclear
        with working_precision(cell.bits):
            turn = 2 * arb.pi()
            # the phase is known up to whole turns: that of the interval is followed
            away = ((self.branch.phase.mid() - found[0].phase.mid()) / turn + fmpq(1, 2)).floor()
            phase = found[0].phase + turn * away.mid()
            if not phase.overlaps(self.branch.phase):
                raise Unclear
            followed = replace(found[0], phase=phase)
            return followed.total(self.whole) - turn * self.turns, followed.slope(self.whole)

    def at(self, family: Family, e: fmpq) -> arb:
        """Return what passes zero at one e of the interval. Raises Unclear."""
        return self.over(Cell(family, e, e))[0]


@dataclass(frozen=True)
class Touch:
    """A root that is on the circle, as far as balls tell, where the delay is whole periods: at the end of a cell."""

    before: Passage
    whole: int


def passage(cell: Cell, whole: int) -> Passage | Touch | None:
    """Return the passage over a cell that has one at most. Raises Unclear for one that may have more, and TooNear."""
    unclear: list[Branch | None] = [one for one in cell.branches if turns(one.total(whole), cell.bits) is None]
    if cell.may_end(whole):
        unclear.append(None)
    if not unclear:
        return None
    if len(unclear) > 1:
        raise Unclear
    found = Passage(whole, cell.low, cell.high, unclear[0])
    slope = found.over(cell)[1]
    if slope is None or slope.contains(0):
        raise Unclear
    first, last = (found.at(cell.family, e) for e in (cell.low, cell.high))
    if found.branch is None:
        sides = [None if value.contains(0) else int(bool(value > 0)) for value in (first, last)]
    else:
        sides = [turns(value, cell.bits) for value in (first, last)]
    return _decided(found, cell, *sides)


def _decided(found: Passage, cell: Cell, first: int | None, last: int | None) -> Passage | Touch | None:
    """Return what two sides of multiples of 2 pi tell of a passage."""
    if first is None:
        raise TooNear
    if last is None:
        if cell.high < cell.family.period:
            raise TooNear
        return Touch(found, found.whole + 1)
    if first == last:
        return None
    if found.branch is not None and abs(first - last) > 1:
        raise Unclear
    return found if found.branch is None else replace(found, turns=max(first, last))


def turns(total: arb, bits: int) -> int | None:
    """Return between which multiples of 2 pi an angle lies: the lower one; None where it may be one of them."""
    with working_precision(bits):
        count = total / (2 * arb.pi())
        low, high = count.floor().unique_fmpz(), count.ceil().unique_fmpz()
    return int(low) if low is not None and high is not None and high == low + 1 else None


def following(cell: Cell, whole: int) -> int:
    """Return the least number of periods from `whole` on for which a root may pass over a cell."""
    if cell.ends:
        return whole
    return min((_following(one, whole, cell.bits) for one in cell.branches), default=whole + _FAR)


_FAR = 1 << 40


def _following(branch: Branch, whole: int, bits: int) -> int:
    now = turns(branch.total(whole), bits)
    if now is None:
        return whole
    with working_precision(bits):
        # the angle grows with every period: between the same two multiples nothing happens
        last = ((2 * arb.pi() * (now + 1) + branch.phase) / branch.angle).lower()
        return max(whole, int(last.fmpq().ceil())) if last.is_finite() else whole


class Refined:
    """The delay of a passage less the delay that there is, in balls of any width (s)."""

    def __init__(self, made: Callable[[int], Family], found: Passage | Touch, delay: fmpq) -> None:
        self._made, self._found, self._delay = made, found, delay
        self._passage = found if isinstance(found, Passage) else found.before
        self._period = made(64).period
        self._low, self._high = self._passage.low, self._passage.high
        self.good = True
        if isinstance(found, Touch):
            self._low, self._high = self._touched(64)

    def __call__(self, bits: int) -> arb:
        """Return a ball of about so many relative bits."""
        if isinstance(self._found, Touch):
            self._low, self._high = self._touched(bits)
        else:
            self._newton(min(bits, HIGHEST))
        begin = self._passage.whole * self._period - self._delay
        with working_precision(2 * bits + 64):
            return arb(begin + self._low).union(arb(begin + self._high))

    def _newton(self, bits: int) -> None:
        family, begin = self._made(2 * bits + 256), self._passage.whole * self._period - self._delay
        for _ in range(2 * bits + 64):
            wanted = max(begin + self._low, self._period * fmpq(1, 1 << 40)) * fmpq(1, 1 << bits)
            if self._high - self._low <= wanted or not self._closer(family):
                return

    def _closer(self, family: Family) -> bool:
        """Move the ends towards each other; False where that does not go on."""
        low, high = self._low, self._high
        middle = _rounded((low + high) / 2, high - low)
        try:
            value, slope = self._passage.at(family, middle), self._passage.over(Cell(family, low, high))[1]
        except Unclear:
            return False
        if slope is None or slope.contains(0):
            return False
        with working_precision(family.bits):
            met = arb(middle) - value / slope
            first, last = met.lower().fmpq(), met.upper().fmpq()
        first, last = max(low, first), min(high, last)
        if last < first or not last - first < (high - low) * fmpq(3, 4):
            return False
        self._low, self._high = first, last
        return True

    def _touched(self, bits: int) -> tuple[fmpq, fmpq]:
        """Return ends a little before and after whole periods between which the root passes, as narrow as is told."""
        away = self._period * fmpq(1, 1 << (bits + 8))
        family, period, before = self._made(2 * bits + 256), self._period, self._passage
        try:
            first = before.at(family, before.low)
            early = before.at(family, period - away)
            late = replace(before, whole=before.whole + 1, branch=self._branch_at_end(family)).at(family, away)
        except Unclear:
            self.good = False
            return self._low, self._high
        if before.branch is None:
            passes = bool(first * early > 0) and bool(early * late < 0)
        else:
            sides = [turns(value, family.bits) for value in (first, early)]
            passes = sides[0] is not None and sides[0] == sides[1] and _opposite(early, late, family.bits)
        if not passes:
            self.good = self._high > period and self.good
            return self._low, self._high
        return period - away, period + away

    def _branch_at_end(self, family: Family) -> Branch | None:
        """Return the branch at e = 0 of the next period: that at e = T, as z N(z, T) = N(z, 0)."""
        own = self._passage.branch
        if own is None:
            return None
        found = [one for one in Cell(family, self._period, self._period).branches if one.x.overlaps(own.x)]
        if len(found) != 1:
            raise Unclear
        next_ = [one for one in Cell(family, fmpq(0), fmpq(0)).branches if one.x.overlaps(found[0].x)]
        if len(next_) != 1:
            raise Unclear
        with working_precision(family.bits):
            # a little of both sides, so that a branch a little later is recognised
            return replace(next_[0], x=own.x, phase=next_[0].phase + arb(0, 1))


def _opposite(early: arb, late: arb, bits: int) -> bool:
    """Whether two angles close to a multiple of 2 pi lie on different sides of it."""
    with working_precision(bits):
        turn = 2 * arb.pi()
        away = [angle - turn * (angle / turn + fmpq(1, 2)).floor().mid() for angle in (early, late)]
        near = all(abs(one) < 1 for one in away)
        return near and bool(away[0] * away[1] < 0)


def _rounded(value: fmpq, width: fmpq) -> fmpq:
    """Return a dyadic number near a value, by less than a 64th of a width."""
    scale = fmpq(1 << max(int((64 / width).ceil()).bit_length(), 0))
    return fmpq((value * scale).floor()) / scale
