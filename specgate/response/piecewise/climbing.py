"""The supremum of a derivative of a piecewise response over a stretch of time, and where it is taken.

Best first: of all patches that are left the one whose hull reaches highest is looked at. A patch is done with if its
hull is below a value that is known to be reached, if the function moves one way on it or is bent upward (its greatest
value is at an end then: an end of the piece is a candidate of its own, any other belongs to a neighbour too, on which
the function cannot fall away to both sides), or if it is bent downward and turns: then it holds one summit, which is
kept. A patch that is not told apart from the best value by more than a small slack is kept as `blurred`.
"""

from __future__ import annotations

from collections.abc import Iterable
from heapq import heappop, heappush

from flint import arb, fmpq

from specgate.response.pieces import Pieces
from specgate.response.piecewise.passing import Instant, Where, Work
from specgate.response.piecewise.patches import LEVEL, LOOK, Ground, Patch
from specgate.response.piecewise.turning import Zero, exact_at, sign_at
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_CLOSE = 512
_FIRST = 64


class Ceiling:
    """Search for the supremum of sign * y^(order), order 0 or 1, above a value that is reached or approached."""

    def __init__(self, ground: Ground, order: int, sign: int, floor: arb, slack: fmpq) -> None:
        self._ground = ground
        self._order = order
        self._sign = sign
        self._slack = arb(slack)
        self._work = Work()
        self._heap: list[tuple[float, int, Patch]] = []
        self._count = 0
        self.best = floor
        self.found: list[Peak] = []
        self.blurred: list[Patch] = []

    def at(self, time: fmpq) -> None:
        """Take up the value at an instant (just after it at a kink)."""
        with working_precision(self._bits):
            self._candidate(self._ground.index(time), time)

    @property
    def _bits(self) -> int:
        """Bits of all that is done with balls here: at fewer even a change of sign would round them."""
        return self._ground.bits + LOOK

    def over(self, since: fmpq, until: fmpq) -> None:
        """Search a stretch of time, its ends and the kinks in it included. Raises OutOfWork.

        Kinks are looked at from both sides where y may jump. A piece on which y rests is what it is at its begin.
        """
        with working_precision(self._bits):
            self._over(since, until)

    def _over(self, since: fmpq, until: fmpq) -> None:
        index, last = self._ground.span(since, until)
        likely = self._ground.pieces.likely(index + 1, last, self._order, self._sign)
        if likely is not None:
            self._raise(Peak(self._ground.pieces, self._order, self._sign, self._begin(likely)).height(_FIRST))
        while index <= last:
            calm = self._ground.pieces.calm(index, self._order, self._sign, self.best.fmpq())
            if calm == 0:
                self._take(index, since, until)
            index += max(calm, 1)
        self._search()

    def _begin(self, index: int) -> Instant:
        return Instant(index, self._ground.ends(index)[0])

    def _take(self, index: int, since: fmpq, until: fmpq) -> None:
        """Take up the ends of a piece and what lies between them."""
        begin, end = self._ground.ends(index)
        left, right = max(begin, since), until if end is None else min(end, until)
        if begin < since or self._order > 0 or self._ground.pieces.jump(index) != 0:
            self._candidate(index, left)
        degree = self._degree(index)
        if degree > 0:
            self._candidate(index, right)
        for root in self._ground.roots(index, begin, end, until):
            near, far = max(root.left, since), min(root.right, until)
            if degree > 1 and near < far and not self._starts_one_way(root):
                whole = near == root.left and far == root.right
                self._push(root if whole else root.between(near, far))

    def _degree(self, index: int) -> int:
        """Return the degree of the derivative that is searched on a piece, 2 for all but constant and straight ones."""
        if self._ground.pieces.flat(index):
            return 0
        polynomial = self._ground.pieces.polynomial(index)
        return 2 if polynomial is None else min(2, max(0, polynomial.degree() - self._order))

    def _starts_one_way(self, patch: Patch) -> bool:
        """Whether a patch lies in a proved monotone start of y: its greatest value is at an end then."""
        start = self._ground.start(patch.index)
        if start is None or self._order != 0 or patch.right > start[0]:
            return False
        if start[1] * self._sign > 0:
            self._candidate(patch.index, patch.right)
        return True

    def _candidate(self, index: int, time: fmpq) -> None:
        """Take up a value at an end of a piece or of the stretch."""
        peak = Peak(self._ground.pieces, self._order, self._sign, Instant(index, time))
        height = peak.height(_FIRST)
        self._raise(height)
        if not height < self.best:
            self.found.append(peak)

    def _raise(self, height: arb) -> None:
        low = height.lower()
        if low > self.best:
            self.best = low

    def _push(self, patch: Patch) -> None:
        low, high = patch.rough(self._order)
        top = high if self._sign > 0 else -low
        if top < self.best:
            return
        low, high = patch.hull(self._order)
        top = high if self._sign > 0 else -low
        if not top < self.best:
            self._count += 1
            heappush(self._heap, (-float(top) if top.is_finite() else float("-inf"), self._count, patch))

    def _search(self) -> None:
        while self._heap:
            _, _, patch = heappop(self._heap)
            self._work.spend()
            low, high = patch.hull(self._order)
            top = high if self._sign > 0 else -low
            if top < self.best or self._one_way(patch):
                continue
            if self._domed(patch) and self._turns(patch):
                continue
            self._raise(self._sign * patch.middle[self._order])
            with working_precision(patch.bits):
                near = bool(top - self._slack < self.best)
            if near:
                self.blurred.append(patch)
                continue
            for part in patch.parts:
                self._push(part)

    def _slopes(self, patch: Patch) -> tuple[arb, arb]:
        low, high = patch.hull(self._order + 1)
        return (low, high) if self._sign > 0 else (-high, -low)

    def _one_way(self, patch: Patch) -> bool:
        low, high = self._slopes(patch)
        return bool(low > 0 or high < 0 or (low.is_zero() and high.is_zero()))

    def _bends(self, patch: Patch) -> tuple[arb, arb]:
        low, high = patch.hull(2) if self._order == 0 else patch.rough(3)
        return (low, high) if self._sign > 0 else (-high, -low)

    def _domed(self, patch: Patch) -> bool:
        """Whether a patch is bent one way: upward it is done with, downward it may hold one summit."""
        low, high = self._bends(patch)
        return bool(low > 0 or high < 0)

    def _turns(self, patch: Patch) -> bool:
        """Keep the summit of a patch that is bent one way, if it has one; False: whether it has is not told."""
        if self._bends(patch)[0] > 0:
            return True
        before, after = (
            sign_at(patch.pieces, patch.index, self._order + 1, LEVEL, time, _CLOSE)
            for time in (patch.left, patch.right)
        )
        if before is None or after is None:
            return False
        for told, time in ((before, patch.left), (after, patch.right)):
            if told == 0:
                self._candidate(patch.index, time)
        before, after = self._sign * before, self._sign * after
        if before > 0 and after < 0:
            ends = (patch.left, patch.right)
            zero = Zero(patch.pieces, patch.index, self._order + 1, LEVEL, ends, rising=self._sign < 0)
            peak = Peak(patch.pieces, self._order, self._sign, zero)
            self._raise(peak.height(_FIRST))
            self.found.append(peak)
        return True


@record
class Peak:
    """A place where sign * y^(order) may be greatest."""

    pieces: Pieces
    order: int
    sign: int
    where: Where

    @property
    def exact(self) -> fmpq | None:
        """The value, where it is known exactly."""
        if isinstance(self.where, Zero):
            return None
        known = exact_at(self.pieces, self.where.index, self.order, self.where.time)
        return self.pieces.jump(0) if known is None and self.where.time == 0 and self.order == 0 else known

    def height(self, bits: int) -> arb:
        """Return sign * y^(order) there."""
        value = self.value(bits)
        with working_precision(2 * bits + LOOK):
            return self.sign * value

    def value(self, bits: int) -> arb:
        """Return y^(order) there."""
        if isinstance(self.where, Zero):
            return self.where.value(bits)
        known = self.exact
        if known is not None:
            with working_precision(bits):
                return arb(known)
        return value_at(self.pieces, self.where.index, self.order, self.where.time, bits)


def value_at(pieces: Pieces, index: int, order: int, time: fmpq, bits: int, most: int = 4608) -> arb:
    """Return a derivative at an instant of a piece, of relative radius 2^-bits where `most` bits reach it."""
    known = exact_at(pieces, index, order, time)
    if known is not None:
        return _ball(known, bits)
    precision = max(LOOK, bits + 32)
    while True:
        with working_precision(precision):
            instant = arb(time)
        value = pieces.derivatives(index, instant, precision)[order]
        if value.rel_accuracy_bits() >= bits or value.is_zero() or 2 * precision > most:
            return value
        precision *= 2


def _ball(value: fmpq, bits: int) -> arb:
    with working_precision(bits + 32):
        return arb(value)


def tallest(peaks: Iterable[Peak], floor: arb, reached: arb, most: int) -> list[Peak]:
    """Return the peaks that are not proved lower than another one, than the floor or than a value that is reached."""
    left, bits = list(peaks), 64
    while left and bits <= most:
        with working_precision(2 * bits + LOOK):
            heights = [(peak, peak.height(bits)) for peak in left]
            best = reached
            for _, height in heights:
                low = height.lower()
                best = low if low > best else best
            kept = [(peak, height) for peak, height in heights if not (height < best or height < floor)]
        left = [peak for peak, _ in kept]
        if len(kept) == 1 and kept[0][1] > floor:
            break
        bits *= 2
    return left
