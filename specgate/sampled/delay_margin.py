"""The dead time that a sampled loop stands: how much later its held output may arrive before the loop is unstable.

A dead time of a part of a period is no lag of L(z): it makes another pulse transfer function. So the whole delay
d = n T + e goes into the characteristic polynomial, z^n D(z) + N(z, e). The loop stops being stable where, for the
first time, a root of it is on the unit circle. Where that may be is known for all n at once (`delay_cell`): the period
is cut into intervals of e, and for each of them and each branch n theta - arg(-N/D) either holds no multiple of 2 pi
over the whole interval, or the interval is cut until it does not or until the angle runs one way and its ends tell that
it passes one. Between two n's that lie between the same multiples of 2 pi none has to be looked at, for theta > 0.
e = T with n and e = 0 with n + 1 are the same delay; a root that is there as far as balls tell is between a little
before and a little after. Where the plant passes on at once what is held, a sample at kT sees another value for every
delay a little above n T than for n T: the loop is looked at anew there, and may lose its stability at once.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from itertools import pairwise

from flint import arb, arb_poly, fmpq, fmpq_mat

from specgate.frequency.margins import NOT_USED_UP
from specgate.response.accounts import Account, Footing
from specgate.response.answers import Answer
from specgate.sampled.blocks import LONGEST_DELAY
from specgate.sampled.circle import is_hurwitz_in_balls
from specgate.sampled.components import Component
from specgate.sampled.delay_cell import Cell, Unclear
from specgate.sampled.delay_family import Family, family
from specgate.sampled.passages import Passage, Refined, TooNear, Touch, following, passage
from specgate.sampled.rungs import kept
from specgate.sampled.sayings import GROUND
from specgate.sampled.state_space import StateSpace, of_rows
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

_BITS = (256, 768)
_PARTS = 6
_CELLS = 1500
"""Intervals that are looked at before the question is left open."""
_STEPS = 5000
_FINEST = fmpq(1, 1 << 60)
_CUT = fmpq(33, 64)
"""Cuts avoid the fractions of a period that a margin may be by design."""

_METHOD = (
    "the added dead time goes into the characteristic polynomial in z itself; where a root of it may be on the unit "
    "circle is isolated in balls for all delays, and the first delay at which one is follows from a change of sign"
)


def delay_margin(component: Component, *, unit_at_one: bool = False) -> Answer:
    """Return the least dead time (s) that makes a stable loop with a single held output unstable.

    unit_at_one: whether L(1) is exactly 1, whatever the delay is.
    """
    found = _single(component)
    if found is None:
        return Answer.undecided("several outputs are held in this loop: which of them arrives late is not told")
    motion, law, delay = found
    made = kept(lambda bits: family(motion, law, component.period, bits, unit_at_one=unit_at_one))
    proved, direct = fmpq(0), any(entry != 0 for entry in motion.d.entries())
    for bits in _BITS:
        search = _Search(made, delay, component.period, bits, direct=direct)
        try:
            return search.answer()
        except _Untold as untold:
            proved = max(proved, untold.proved)
    least = int(proved.p) / int(proved.q)
    return Answer.undecided(f"the loop stands {least:.4g} s at least; how much more is not told within the work limit")


def _single(component: Component) -> tuple[StateSpace, StateSpace, fmpq] | None:
    """Return motion and law of a loop with one input that is used, and the whole delay of that."""
    cycle = component.cycle
    if cycle is None or int(cycle.law.d.nrows()) != 1:
        return None
    b, d = cycle.motion.b, cycle.motion.d
    used = [
        j
        for j in range(int(d.ncols()))
        if any(row[j] != 0 for row in b.tolist()) or any(row[j] != 0 for row in d.tolist())
    ]
    if len(used) != 1:
        return None
    (j,) = used
    motion = StateSpace(cycle.motion.a, _column(b.tolist(), j), cycle.motion.c, _column(d.tolist(), j))
    whole, part = cycle.lags[j]
    return motion, cycle.law, whole * component.period + part


def _column(rows: list[list[fmpq]], place: int) -> fmpq_mat:
    return of_rows([[row[place]] for row in rows], 1)


class _Untold(Exception):
    """The search ends; up to `proved` (s) more the loop is proved stable."""

    def __init__(self, proved: fmpq) -> None:
        self.proved = proved


class _Search:
    def __init__(self, made: Callable[[int], Family], delay: fmpq, period: fmpq, bits: int, *, direct: bool) -> None:
        self._made, self._delay, self._period, self._bits = made, delay, period, bits
        self._direct = direct
        self._first = int((delay / period).floor())
        self._begin = delay - self._first * period
        self._count = 0
        self._reached = delay

    def answer(self) -> Answer:
        """Return the margin. Raises _Untold."""
        cells = list(self._cover())
        whole = self._first
        lost = self._begin == 0 and self._lost_at_once(whole)
        if not lost and all(cell.empty for cell in cells):
            return Answer.nothing(NOT_USED_UP, infinite=True)
        for _ in range(_STEPS):
            if lost:
                return Answer.of_exact(whole * self._period - self._delay)
            for cell in cells:
                if whole > self._first or cell.low >= self._begin:
                    found = self._passed(cell, whole)
                    if found is not None:
                        return self._answered(found)
                    self._reached = whole * self._period + cell.high
            whole = whole + 1 if self._direct else min(following(cell, whole + 1) for cell in cells)
            self._reached = whole * self._period
            lost = self._lost_at_once(whole)
        raise self._end()

    def _lost_at_once(self, whole: int) -> bool:
        """Whether the loop is unstable for delays a little above whole periods. Raises _Untold."""
        if not self._direct:
            return False
        if whole - self._first > LONGEST_DELAY:
            raise self._end()
        bits = self._bits + 8 * whole
        made = self._made(bits)
        answer, _ = made.over(arb(self._period))
        with working_precision(bits):
            turned = arb_poly([1, 1]) ** whole * arb_poly(made.opened)
            polynomial = turned + arb_poly([1, -1]) ** whole * arb_poly(answer)
            found = polynomial.coeffs()
            stable = is_hurwitz_in_balls([*found, *([arb(0)] * (whole + len(answer) - len(found)))], bits)
        if stable is None:
            raise self._end()
        return not stable

    def _answered(self, found: Passage | Touch) -> Answer:
        refined = Refined(self._made, found, self._delay)
        if not refined.good:
            raise self._end()
        return Answer(Proof.ENCLOSED, refine=refined, how=self._how(found))

    def _how(self, found: Passage | Touch) -> Callable[[], Account]:
        counts = {"intervals of the period": self._count, "bits at first": self._bits, "whole periods": found.whole}
        return lambda: Account(_METHOD, Footing(GROUND), brackets=1, counts=counts)

    def _end(self) -> _Untold:
        return _Untold(max(self._reached - self._delay, fmpq(0)))

    # --- cells --------------------------------------------------------------------------------------------

    def _cover(self) -> Iterator[Cell]:
        """Give intervals over the whole period, in order, over each of which the branches are told apart."""
        inner = {self._period * (fmpq(k, _PARTS) + fmpq(1, 1009)) for k in range(1, _PARTS)}
        edges = sorted({fmpq(0), self._begin, self._period, *inner})
        for low, high in pairwise(edges):
            yield from self._told(self._cell(low, high))

    def _told(self, cell: Cell) -> Iterator[Cell]:
        if cell.told:
            yield cell
        else:
            for part in self._cut(cell):
                yield from self._told(part)

    def _cell(self, low: fmpq, high: fmpq) -> Cell:
        self._count += 1
        if self._count > _CELLS or high - low < self._period * _FINEST:
            raise self._end()
        return Cell(self._made(self._bits), low, high)

    def _cut(self, cell: Cell) -> tuple[Cell, Cell]:
        middle = cell.low + (cell.high - cell.low) * _CUT
        return self._cell(cell.low, middle), self._cell(middle, cell.high)

    # --- passages -----------------------------------------------------------------------------------------

    def _passed(self, cell: Cell, whole: int) -> Passage | Touch | None:
        """Return the first passage over a cell. Raises _Untold."""
        try:
            return passage(cell, whole)
        except TooNear:
            raise self._end() from None
        except Unclear:
            for part in self._cut(cell):
                found = self._passed(part, whole)
                if found is not None:
                    return found
                self._reached = max(self._reached, whole * self._period + part.high)
            return None
