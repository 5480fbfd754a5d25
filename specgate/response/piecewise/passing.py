"""The first instant, forward or backward in time, at which a piecewise response is beyond a line.

Beyond means side * (y - line) > 0; touching is not beyond, except in a closed walk where it is known to be exact. A
walk goes from patch to patch in one direction; where it enters a patch y is known not to be beyond. A patch is passed
if its hull is not beyond, if y - line moves one way and its far end is not beyond (the near end is not), or if it
bulges outward and its one summit is not beyond. Else it is cut, and at last it either shows a crossing, on a stretch
where y - line moves one way, or touches the line so closely that the highest precision does not tell: such an instant
is kept, and passed.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

from flint import arb, fmpq

from specgate.response.budget import Exhausted, OutOfWork
from specgate.response.piecewise.patches import Ground, Line, Patch
from specgate.response.piecewise.turning import Zero, exact_at, sign_at
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record

PATCHES = 20_000
"""Patches that one search may look at."""

_DEEPEST = 120
_CLOSE = 512


@record
class Instant:
    """A kink, or an end of a stretch that was looked at, as it is."""

    index: int
    time: fmpq

    def enclose(self, bits: int) -> arb:
        """Return a ball of the time (s)."""
        with working_precision(bits):
            return arb(self.time)


Where = Zero | Instant


@dataclass
class Work:
    """Counts the patches that one search looks at."""

    left: int = PATCHES

    def spend(self) -> None:
        """Take one patch off. Raises Exhausted when there are none left."""
        self.left -= 1
        if self.left < 0:
            raise Exhausted(f"not decided within the work limit of {PATCHES} patches")


@dataclass
class Walk:
    """One walk; `touching` gathers the instants at which y is not told from the line."""

    ground: Ground
    line: Line
    side: int
    backward: bool
    closed: bool = False
    work: Work = field(default_factory=Work)
    touching: list[Where] = field(default_factory=list)

    def between(self, since: fmpq, until: fmpq | None) -> Where | None:
        """Return the first instant beyond the line between two times, in the direction of the walk.

        Backward walks need `until`, and y is known not to be beyond there; forward ones look just after `since` too.
        None: there is none, apart from what touches.
        """
        first = self.ground.index(since)
        last = None if until is None else self.ground.span(since, until)[1]
        index, step = (last or 0, -1) if self.backward else (first, 1)
        while first <= index and (last is None or index <= last):
            calm = self._calm(index)
            if calm == 0:
                begin, end = self.ground.ends(index)
                found = self._piece(index, begin, end, since, until)
                if found is not None:
                    return found
                if end is None and not self.backward:
                    return None
            index += step * max(calm, 1)
        return None

    def _calm(self, index: int) -> int:
        """Return how many pieces in a row, from this one on, are known to stay on this side of the line."""
        if self.line.slope != 0:
            return 0
        return self.ground.pieces.calm(index, 0, self.side, self.side * self.line.value, backward=self.backward)

    def _piece(self, index: int, begin: fmpq, end: fmpq | None, since: fmpq, until: fmpq | None) -> Where | None:
        """Walk through one piece; the jump into it may be beyond by itself.

        Where y is known not to jump it is not beyond just after a kink if it was not just before it.
        """
        if self.backward:
            whole = end is not None and (until is None or end <= until)
            entry, jumps = (end if whole else None), whole and self.ground.pieces.jump(index + 1) != 0
        else:
            entry, jumps = max(begin, since), begin <= since or self.ground.pieces.jump(index) != 0
        if entry is not None and jumps:
            found = self._enter(index, entry)
            if found is not None:
                return found
        for patch in self._patches(index, begin, end, since, until):
            found = self._within(patch)
            if found is not None:
                return found
        return None

    def _enter(self, index: int, time: fmpq) -> Where | None:
        """Return the instant at which a piece is entered if y is beyond there, one-sided."""
        beyond = self._side_at(index, time)
        if beyond == 1 or (beyond == 0 and self.closed):
            return Instant(index, time)
        if beyond is None:
            self.touching.append(Instant(index, time))
        return None

    def _side_at(self, index: int, time: fmpq) -> int | None:
        """Return the sign of side * (y - line) at an instant; just after the start it may be known exactly."""
        if time == 0:
            jump = self.ground.pieces.jump(0)
            if jump is not None:
                away = self.side * (jump - self.line.at(time))
                return (away > 0) - (away < 0)
        sign = sign_at(self.ground.pieces, index, 0, self.line, time)
        return None if sign is None else self.side * sign

    def _patches(self, index: int, begin: fmpq, end: fmpq | None, since: fmpq, until: fmpq | None) -> Iterator[Patch]:
        roots = self.ground.roots(index, begin, end, until)
        for root in reversed(list(roots)) if self.backward else roots:
            left, right = max(root.left, since), root.right if until is None else min(root.right, until)
            if left < right:
                whole = left == root.left and right == root.right
                yield root if whole else root.between(left, right)

    def _within(self, root: Patch) -> Where | None:
        """Walk through a patch and its parts, the near ones first."""
        waiting = [root]
        while waiting:
            patch = waiting.pop()
            self.work.spend()
            found = self._settled(patch)
            if isinstance(found, Zero | Instant):
                return found
            if found is None:
                if patch.depth >= _DEEPEST:
                    raise OutOfWork("a flat stretch of the response is too close to the limit to be decided")
                waiting += patch.parts if self.backward else reversed(patch.parts)
        return None

    def _settled(self, patch: Patch) -> Where | bool | None:
        """Judge a patch, by what is known of it exactly if there is such."""
        polynomial = patch.pieces.polynomial(patch.index)
        if polynomial is not None and polynomial.degree() <= 1:
            return self._straight(patch)
        start = self._start_slope(patch)
        return self._judge(patch) if start == 0 else self._one_way(patch, start)

    def _straight(self, patch: Patch) -> Where | bool:
        """Judge a patch on which y - line is straight, exactly."""
        near, far = (patch.right, patch.left) if self.backward else (patch.left, patch.right)
        here, there = (exact_at(patch.pieces, patch.index, 0, time) for time in (near, far))
        assert here is not None
        assert there is not None
        before, after = (self.side * (value - self.line.at(time)) for value, time in ((here, near), (there, far)))
        if after < 0 or (after == 0 and not self.closed):
            return True
        if after == 0:
            return Instant(patch.index, far)
        return Instant(patch.index, near + (far - near) * before / (before - after))

    def _start_slope(self, patch: Patch) -> int:
        """Return the sign of the slope of side * (y - line) on a proved monotone start, 0 elsewhere."""
        start = self.ground.start(patch.index)
        if start is None or self.line.slope != 0 or patch.right > start[0]:
            return 0
        return start[1] * self.side

    def _judge(self, patch: Patch) -> Where | bool | None:
        """Return the crossing on a patch, True where there is none, None where it has to be cut."""
        side = self.side
        with working_precision(patch.bits):
            low, high = patch.rough(0)
            ends = arb(self.line.at(patch.left)).union(arb(self.line.at(patch.right)))
            if self._is_inside(high - ends if side > 0 else ends - low):
                return True
            low, high = patch.above(self.line, 0)
            if self._is_inside(high if side > 0 else -low):
                return True
        slope = _outward(patch.above(self.line, 1), side)
        if slope != 0:
            return self._one_way(patch, slope)
        bend = _outward(patch.above(self.line, 2), side)
        return self._bulge(patch) if bend < 0 else None

    def _is_inside(self, highest: arb) -> bool:
        """Whether a bound of side * (y - line) shows that y is not beyond."""
        return bool(highest < 0 if self.closed else highest <= 0)

    def _one_way(self, patch: Patch, slope: int) -> Where | bool:
        """Judge a patch on which side * (y - line) rises (slope 1) or falls (-1) in time."""
        if (slope > 0) == self.backward:
            return True
        far = patch.left if self.backward else patch.right
        return self._to_far_end(patch, far)

    def _to_far_end(self, patch: Patch, far: fmpq) -> Where | bool:
        """Return the crossing between the near end of a patch and a place up to which f moves outward one way."""
        beyond = self._side_at(patch.index, far)
        if beyond == 1:
            near = patch.right if self.backward else patch.left
            ends = (far, near) if self.backward else (near, far)
            rising = (self.side > 0) != self.backward
            return Zero(patch.pieces, patch.index, 0, self.line, ends, rising=rising)
        if beyond is None:
            self.touching.append(Instant(patch.index, far))
        return Instant(patch.index, far) if beyond == 0 and self.closed else True

    def _bulge(self, patch: Patch) -> Where | bool | None:
        """Judge a patch on which side * (y - line) is bent inward: it has at most one summit."""
        before, after = (
            sign_at(patch.pieces, patch.index, 1, self.line, time, _CLOSE) for time in (patch.left, patch.right)
        )
        if before is None or after is None:
            return None
        before, after = before * self.side, after * self.side
        if before <= 0 or after >= 0:
            return self._one_way(patch, -1 if before <= 0 else 1)
        ends = (patch.left, patch.right)
        summit = Zero(patch.pieces, patch.index, 1, self.line, ends, rising=self.side < 0)
        bits = 64
        while bits <= HIGHEST:
            with working_precision(2 * bits):
                height = summit.value(bits) * self.side
            if height < 0:
                return True
            if height > 0:
                near = summit.right if self.backward else summit.left
                if self._side_at(patch.index, near) == 1:
                    return self._to_far_end(patch, near)
            bits *= 2
        self.touching.append(summit)
        return True


def _outward(hull: tuple[arb, arb], side: int) -> int:
    """Return the sign that side * g keeps for certain, 0 where it may have either."""
    if hull[0] > 0:
        return side
    return -side if hull[1] < 0 else 0
