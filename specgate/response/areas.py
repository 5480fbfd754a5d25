"""Integrals of |y| and of y^2 over all time, for a response whose pieces have closed forms of their integrals.

|y| is integrated between the zeros of y, which are certified; where y is too flat for its sign to be told, its integral
is bounded instead. A zero that is known to r gives an error of at most 2 r sup |y| near it, which is of order r^2.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.modes import GUARD, dyadic
from specgate.response.passing import Work
from specgate.response.patches import LEVEL, LOOK, Ground, Patch
from specgate.response.turning import Zero, sign_at
from specgate.terms.precision import working_precision

LASTING = "what is integrated does not vanish in the end: its integral grows without bound"
_OPEN = "its integral has no closed form here"
_FAINT = 40
_FIRST, _MOST = 70, 280
"""Bits: how small what is left out is beside the whole, at first and at most."""


@dataclass(frozen=True)
class Run:
    """A stretch of one piece on which y has one sign (0: not told); its ends are instants or zeros of y."""

    index: int
    sign: int
    left: fmpq | Zero
    right: fmpq | Zero
    bound: arb


class Areas:
    """The integrals of one response that tends to zero."""

    def __init__(self, ground: Ground, size: fmpq) -> None:
        self._ground = ground
        self._pieces = ground.pieces
        self._size = size
        self._runs: dict[int, tuple[fmpq, list[Run]]] = {}

    def absolute(self) -> Answer:
        """Return the integral of |y|."""
        return self._answer(0)

    def squared(self) -> Answer:
        """Return the integral of y^2."""
        return self._answer(1)

    def _answer(self, power: int) -> Answer:
        try:
            self._total(power, _FIRST)
        except OutOfWork as limit:
            return Answer.undecided(limit.reason)
        kept: dict[int, arb] = {}

        def refine(bits: int) -> arb:
            if bits not in kept:
                kept[bits] = self._total(power, min(max(bits + 8, _FIRST), _MOST))
            return kept[bits]

        return Answer.of_ball(refine)

    def _total(self, power: int, bits: int) -> arb:
        until = self._horizon(power, bits)
        rest = self._pieces.rest(until)
        assert rest is not None
        with working_precision(bits + GUARD):
            total = arb(rest[power] / 2, arb(rest[power] / 2).upper())
            for part in self._squares(until, bits) if power else self._magnitudes(until, bits):
                total += part
        return total

    def _horizon(self, power: int, bits: int) -> fmpq:
        """Return a time after which what is left is at most 2^-bits of what there is."""
        whole: fmpq | None = None
        for stage in range(4, 8 * bits, 4):
            until = self._pieces.settled_by(self._size * dyadic(-stage))
            rest = None if until is None else self._pieces.rest(until)
            if until is None or rest is None:
                raise OutOfWork(_OPEN)
            if whole is None:
                whole = self._least(power, until)
            if rest[power] <= whole * dyadic(-bits):
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
        return [run for index, begin, end in self._ground.kinks(until) for run in self._piece(index, begin, end, until)]

    def _piece(self, index: int, begin: fmpq, end: fmpq | None, until: fmpq) -> Iterator[Run]:
        """Yield the runs of a piece, those of one sign that follow each other as one."""
        since: fmpq | Zero = begin
        sign, last = 0, begin
        for patch, found, zero in self._judged(index, begin, end, until):
            if found == 0 and zero is None:
                if last > (since if isinstance(since, fmpq) else since.right):
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

    def _judged(
        self, index: int, begin: fmpq, end: fmpq | None, until: fmpq
    ) -> Iterator[tuple[Patch, int, Zero | None]]:
        """Yield patches with the sign of y on them, or at their right end where y has a zero on them (0: not told)."""
        work = self._work
        tiny = self._size * dyadic(-_MOST // 2)
        for root in self._ground.roots(index, begin, end, until):
            right = min(root.right, until)
            if root.left >= right:
                continue
            waiting = [root if right == root.right else Patch(root.pieces, index, root.left, right)]
            while waiting:
                patch = waiting.pop()
                work.spend()
                low, high = patch.hull(0)
                with working_precision(LOOK):
                    flat = bool((high - low) * (patch.right - patch.left) * self._pieces.speed(index) < tiny)
                if low >= 0 or high <= 0:
                    yield patch, (1 if low >= 0 else -1), None
                    continue
                slopes = patch.hull(1)
                if slopes[0] > 0 or slopes[1] < 0:
                    ends = [sign_at(patch.pieces, index, 0, LEVEL, time, 512) for time in (patch.left, patch.right)]
                    if None not in ends:
                        yield self._monotone(patch, ends[0] or 0, ends[1] or 0)
                        continue
                if flat or patch.depth > 100:
                    yield patch, 0, None
                    continue
                waiting += reversed(patch.parts)

    def _monotone(self, patch: Patch, before: int, after: int) -> tuple[Patch, int, Zero | None]:
        if before * after >= 0:
            return patch, before or after, None
        return patch, after, Zero(patch.pieces, patch.index, 0, LEVEL, (patch.left, patch.right), rising=after > 0)

    @cached_property
    def _work(self) -> Work:
        return Work()
