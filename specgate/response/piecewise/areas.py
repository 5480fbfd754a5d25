"""Integrals of |y| and of y^2 over all time, for a response whose pieces have closed forms of their integrals.

|y| is integrated between the zeros of y, which are certified; where y is too flat for its sign to be told, its integral
is bounded instead. A zero that is known to r gives an error of at most 2 r sup |y| near it, which is of order r^2.
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import arb, fmpq

from specgate.response.accounts import Account
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.modes import GUARD, dyadic
from specgate.response.piecewise.passing import Work
from specgate.response.piecewise.patches import LEVEL, LOOK, Ground, Patch
from specgate.response.piecewise.recording import LOBES, SQUARES, account
from specgate.response.piecewise.turning import Zero, sign_at
from specgate.response.segments import exact
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record

LASTING = "what is integrated does not vanish in the end: its integral grows without bound"
_OPEN = "its integral has no closed form here"
_FAINT = 40
_DEEPEST = 100
_RUNGS = ((64, 56), (160, 160), (HIGHEST, 280))
"""Up to how many bits are asked for, and how many bits what is left out is below the whole then."""
_FLAT = 24
"""Bits by which the bound on a stretch where the sign is not told is below what is left out."""


@record
class Run:
    """A stretch of one piece on which y has one sign (0: not told); its ends are instants or zeros of y."""

    index: int
    sign: int
    left: fmpq | Zero
    right: fmpq | Zero
    bound: arb


Judged = tuple[Patch, int, Zero | None]


class Areas:
    """The integrals of one response that tends to zero."""

    def __init__(self, ground: Ground, size: fmpq) -> None:
        self._ground = ground
        self._pieces = ground.pieces
        self._size = size
        self._known: dict[Patch, tuple[int, Zero | None] | None] = {}
        self._sizes: dict[int, fmpq] = {}
        self._flat = dyadic(-_FAINT)
        self._work = Work()

    def absolute(self) -> Answer:
        """Return the integral of |y|."""
        return self._answer(0)

    def squared(self) -> Answer:
        """Return the integral of y^2."""
        return self._answer(1)

    def _answer(self, power: int) -> Answer:
        try:
            kept = {_RUNGS[0][1]: self._total(power, _RUNGS[0][1])}
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)

        def refine(bits: int) -> arb:
            rung = next((rung for most, rung in _RUNGS if bits <= most), _RUNGS[-1][1])
            if rung not in kept:
                try:
                    kept[rung] = self._total(power, rung)
                except OutOfWork:
                    kept[rung] = kept[_RUNGS[0][1]]
            return kept[rung]

        return Answer.of_ball(refine).accounted(lambda: self._account(power))

    def _account(self, power: int) -> Account:
        """Say from when on the integral is known as a whole, and how many lobes there are before."""
        bits = _RUNGS[0][1]
        self._flat = dyadic(-bits - _FLAT)
        until, _ = self._remainder(power, bits)
        if power:
            return account(self._ground, SQUARES, None, until)
        runs = self._found(until)
        told = sum(run.sign != 0 for run in runs)
        return account(self._ground, LOBES, None, until, lobes=told, untold=len(runs) - told)

    def _total(self, power: int, bits: int) -> arb:
        self._flat = dyadic(-bits - _FLAT)
        until, total = self._remainder(power, bits)
        with working_precision(bits + GUARD):
            for part in self._squares(until, bits) if power else self._magnitudes(until, bits):
                total += part
        return total

    def _remainder(self, power: int, bits: int) -> tuple[fmpq, arb]:
        """Return a time and a ball of the integral from there on."""
        closed = self._pieces.closing_square(bits) if power else self._pieces.closing(bits)
        if closed is not None:
            return closed
        until = self._horizon(power, bits)
        rest = self._pieces.rest(until)
        assert rest is not None
        with working_precision(bits + GUARD):
            half = arb(rest[power] / 2)
            return until, arb(half.mid(), half.upper())

    def _horizon(self, power: int, bits: int) -> fmpq:
        """Return a time after which what is left is at most 2^-bits of what there is."""
        for stage in range(4, 8 * bits, 6):
            until = self._pieces.settled_by(self._size * dyadic(-stage))
            rest = None if until is None else self._pieces.rest(until)
            if until is None or rest is None:
                raise OutOfWork(_OPEN)
            if power not in self._sizes:
                self._sizes[power] = self._least(power, until)
            if rest[power] <= self._sizes[power] * dyadic(-bits):
                return until
        raise OutOfWork(_OPEN)

    def _least(self, power: int, until: fmpq) -> fmpq:
        """Return about the size of the integral."""
        parts = self._squares(until, _FAINT) if power else self._magnitudes(until, _FAINT)
        total = arb(0)
        for part in parts:
            total += part
        low: fmpq = total.mid().fmpq()
        return low if low > 0 else self._size * dyadic(-64)

    def _squares(self, until: fmpq, bits: int) -> Iterator[arb]:
        for index, begin, end in self._ground.kinks(until):
            part = self._pieces.square(index, begin, until if end is None else min(end, until), bits + GUARD)
            if part is None:
                raise OutOfWork(_OPEN)
            yield part

    def _magnitudes(self, until: fmpq, bits: int) -> Iterator[arb]:
        for run in self._found(until):
            yield self._magnitude(run, bits)

    def _magnitude(self, run: Run, bits: int) -> arb:
        left, near = self._end(run.index, run.left, bits)
        right, far = self._end(run.index, run.right, bits)
        if run.sign == 0:
            with working_precision(bits):
                half = run.bound * (right - left) / 2
                return arb(half.mid(), half.upper())
        area = self._pieces.area(run.index, left, right, bits + GUARD)
        if area is None:
            raise OutOfWork(_OPEN)
        with working_precision(bits + GUARD):
            return run.sign * area + arb(0, (near + far).upper())

    def _end(self, index: int, end: fmpq | Zero, bits: int) -> tuple[fmpq, arb]:
        """Return an end of a run as a number, and a bound of what that leaves out or adds."""
        if not isinstance(end, Zero):
            return end, arb(0)
        end.enclose(bits // 2 + GUARD)
        with working_precision(LOOK):
            span = arb(end.left).union(arb(end.right))
        height = self._pieces.derivatives(index, span, LOOK)[0]
        with working_precision(LOOK):
            return (end.left + end.right) / 2, height.abs_upper() * (end.right - end.left)

    def _found(self, until: fmpq) -> list[Run]:
        self._work = Work()
        return list(self._all(until))

    def _all(self, until: fmpq) -> list[Run]:
        return [run for index, begin, end in self._ground.kinks(until) for run in self._piece(index, begin, end, until)]

    def _piece(self, index: int, begin: fmpq, end: fmpq | None, until: fmpq) -> Iterator[Run]:
        """Yield the runs of a piece, those of one sign that follow each other as one."""
        since: fmpq | Zero = begin
        sign, last = 0, begin
        for patch, found, zero in self._judged(index, begin, end, until):
            if found == 0 and zero is None:
                if sign != 0:
                    yield Run(index, sign, since, last, arb(0))
                low, high = patch.hull(0)
                yield Run(index, 0, patch.left, patch.right, abs(low).max(abs(high)))
                since, sign, last = patch.right, 0, patch.right
                continue
            if zero is not None:
                yield Run(index, -found, since, zero, arb(0))
                since = zero
            elif sign not in (0, found):
                yield Run(index, sign, since, patch.left, arb(0))
                since = patch.left
            sign, last = found, patch.right
        if sign != 0:
            yield Run(index, sign, since, last, arb(0))

    def _judged(self, index: int, begin: fmpq, end: fmpq | None, until: fmpq) -> Iterator[Judged]:
        """Yield patches with the sign of y on them, or at their right end where y has a zero on them (0: not told)."""
        for root in self._ground.roots(index, begin, end, until):
            waiting = [root]
            while waiting:
                patch = waiting.pop()
                if patch.left >= until:
                    continue
                if patch not in self._known:
                    self._work.spend()
                    self._known[patch] = self._judge(patch)
                found = self._known[patch] or self._unsigned(patch)
                if found is None or (patch.right > until and found[1] is not None):
                    waiting += reversed(patch.parts)
                elif patch.right > until:
                    yield patch.between(patch.left, until), *found
                else:
                    yield patch, *found

    def _length(self, index: int) -> fmpq:
        """Return a length of time that is typical of a piece."""
        begin, end, speed = self._pieces.kink(index), self._pieces.kink(index + 1), self._pieces.speed(index)
        times = [] if begin is None or end is None else [end - begin]
        times += [exact(1.0 / speed)] if speed > 0.0 else []
        return min(times, default=fmpq(1))

    def _judge(self, patch: Patch) -> tuple[int, Zero | None] | None:
        """Return the sign of y on a patch, or at its right end and its zero; None where it has to be cut."""
        start = self._ground.start(patch.index)
        if start is not None and patch.right <= start[0] and patch.index == 0 and self._pieces.jump(0) == 0:
            return start[1], None
        low, high = patch.rough(0)
        if low >= 0 or high <= 0:
            return (1 if low >= 0 else -1), None
        low, high = patch.hull(0)
        if low >= 0 or high <= 0:
            return (1 if low >= 0 else -1), None
        slopes = patch.hull(1)
        if slopes[0] > 0 or slopes[1] < 0:
            before, after = (
                sign_at(patch.pieces, patch.index, 0, LEVEL, time, 512) for time in (patch.left, patch.right)
            )
            if before is not None and after is not None:
                return _monotone(patch, before, after)
        return None

    def _unsigned(self, patch: Patch) -> tuple[int, None] | None:
        """Return that the sign of y is not told on a patch, where so little of the integral lies; None elsewhere."""
        low, high = patch.hull(0)
        with working_precision(LOOK):
            share = arb(patch.right - patch.left) / self._length(patch.index)
            flat = bool((high - low) * share < self._size * self._flat)
            # Where a value is known no better than this, a shorter patch tells no more.
            flat = flat or bool(8 * patch.middle[0].rad() > high - low)
        return (0, None) if flat or patch.depth > _DEEPEST else None


def _monotone(patch: Patch, before: int, after: int) -> tuple[int, Zero | None]:
    if before * after >= 0:
        return before or after, None
    return after, Zero(patch.pieces, patch.index, 0, LEVEL, (patch.left, patch.right), rising=after > 0)
