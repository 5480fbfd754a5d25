"""Extremes of a piecewise response: how far a search has to go, and what it finds as an answer.

From T = settled_by(d) on y is within d of its final value. So nothing after it is above a value that is taken or
approached by then and lies d above the final one. As long as nothing above the final value was found, the search goes
to ever smaller d; it ends there if y is proved to stay on the other side for good, and else leaves a small interval.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import replace
from functools import cached_property
from math import frexp

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.extremes import EQUAL_BITS, Extreme, greater, joined, mirrored
from specgate.response.modes import dyadic
from specgate.response.piecewise.climbing import Ceiling, Peak, tallest, value_at
from specgate.response.piecewise.passing import Instant
from specgate.response.piecewise.patches import LOOK, Ground, Patch
from specgate.response.supremum import APPROACHED
from specgate.terms.precision import working_precision

SLACK = -46
"""Exponent of two: parts of the size of the response within which a supremum is known where its summit is not."""

_STAGES = (-4, -12, -22, -34, SLACK)
_START = fmpq(0)
_PROBES = 48
_WAY = 24
"""Doublings of time over which a piece without end is probed."""


class Heights:
    """The extremes of one response that settles."""

    def __init__(self, ground: Ground, final: fmpq) -> None:
        self._ground = ground
        self._pieces = ground.pieces
        self._final = final

    @cached_property
    def size(self) -> fmpq:
        """About how far y gets from its final value, at least: a power of two; 1 where nothing is seen to move."""
        return self._largest(0)

    def _largest(self, order: int) -> fmpq:
        """Return about the largest of |y - final| or |y'| at a few instants."""
        largest = 0.0
        for index, time in self._instants():
            value = value_at(self._pieces, index, order, time, 32)
            with working_precision(LOOK):
                away = abs(value - self._final if order == 0 else value).lower()
            largest = max(largest, float(away) if away.is_finite() else 0.0)
        return dyadic(frexp(largest)[1]) if largest > 0.0 else fmpq(1)

    def _instants(self) -> Iterator[tuple[int, fmpq]]:
        for count, (index, begin, end) in enumerate(self._ground.kinks(None)):
            yield index, begin
            if end is None:
                unit = dyadic(-frexp(self._pieces.speed(index))[1] - 4)
                yield from ((index, begin + unit * dyadic(k)) for k in range(_WAY))
                return
            yield from ((index, begin + (end - begin) * share) for share in (fmpq(3, 7), fmpq(1)))
            if count >= _PROBES:
                return

    def supremum(self, sign: int, since: fmpq = _START) -> Extreme:
        """Return sup sign * y over t >= since, as a value of y, and where it is taken."""
        with working_precision(self._ground.bits + LOOK):
            return self._supremum(sign, since)

    def _supremum(self, sign: int, since: fmpq) -> Extreme:
        with working_precision(self._ground.bits):
            floor = arb(sign * self._final).lower()
        slack = self.size * dyadic(SLACK)
        ceiling = Ceiling(self._ground, 0, sign, floor, slack)
        try:
            ceiling.at(since)
            stays_below = self._search(ceiling, sign, since, slack)
        except OutOfWork as limit:
            return Extreme.undecided(limit.reason)
        with working_precision(4 * EQUAL_BITS):
            exact_floor = arb(sign * self._final)
        peaks = tallest(ceiling.found, exact_floor, ceiling.best, EQUAL_BITS)
        blurred = [patch for patch in ceiling.blurred if not _top(patch, 0, sign) < ceiling.best]
        candidates = [*_merged(peaks), *(self._blur(blurred, ceiling, sign, 0) if blurred else [])]
        above = [extreme for extreme in candidates if not _is_at(extreme, self._final)]
        if above and ceiling.best > floor and stays_below:
            return first_of(above)
        if stays_below and len(above) == 0:
            return next(iter(candidates), Extreme(Answer.of_exact(self._final), Answer.nothing(APPROACHED)))
        return self._nearly(sign, slack)

    def _search(self, ceiling: Ceiling, sign: int, since: fmpq, slack: fmpq) -> bool:
        """Search as far as needed; return whether nothing beyond is above the final value."""
        done, lasting = since, self._pieces.lasting()
        for stage in _STAGES:
            with working_precision(self._ground.bits):
                lead = (ceiling.best - sign * self._final).lower().fmpq()
            if lead >= slack:
                self._up_to(ceiling, done, self._pieces.settled_by(lead))
                return True
            until = self._pieces.settled_by(self.size * dyadic(stage))
            if lasting is not None and lasting[0] * sign <= 0 and (until is None or lasting[1] <= until):
                self._up_to(ceiling, done, lasting[1])
                return True
            self._up_to(ceiling, done, until)
            done = max(done, until or done)
        with working_precision(self._ground.bits):
            return bool(ceiling.best - sign * self._final > arb(slack))

    def _up_to(self, ceiling: Ceiling, done: fmpq, until: fmpq | None) -> None:
        if until is None:
            raise OutOfWork("from when on the response stays near its final value is not told closely enough")
        if until > done:
            ceiling.over(done, until)

    def _blur(self, patches: Sequence[Patch], ceiling: Ceiling, sign: int, order: int) -> list[Extreme]:
        """Return what is left of patches on which the greatest value is known to a small width only."""
        with working_precision(LOOK):
            height = ceiling.best
            for patch in patches:
                height = height.union(_top(patch, order, sign))
            span = arb(min(patch.left for patch in patches)).union(arb(max(patch.right for patch in patches)))
            value = sign * height
        return [Extreme(Answer.of_ball(lambda _: value), Answer.of_ball(lambda _: span))]

    def _nearly(self, sign: int, slack: fmpq) -> Extreme:
        """Return the final value and a little more: whether y passes it is not told."""

        def value(bits: int) -> arb:
            with working_precision(bits):
                return arb(self._final).union(arb(self._final + 2 * sign * slack))

        return Extreme(Answer.of_ball(value), Answer.undecided("whether the final value is passed is not told"))

    def deviation(self, since: fmpq) -> Extreme:
        """Return sup |y - final| over t >= since."""
        up, down = (_shifted(self.supremum(sign, since), -self._final) for sign in (1, -1))
        return greater(up, mirrored(down))

    def rate(self) -> Extreme:
        """Return sup |y'| over t > 0, for a response that does not jump."""
        with working_precision(self._ground.bits + LOOK):
            return self._rate()

    def _rate(self) -> Extreme:
        slack = self._largest(1) * dyadic(SLACK)
        rising, falling = Ceiling(self._ground, 1, 1, arb(0), slack), Ceiling(self._ground, 1, -1, arb(0), slack)
        try:
            told = self._search_rates(rising, falling, slack)
        except OutOfWork as limit:
            return Extreme.undecided(limit.reason)
        best = rising.best.max(falling.best)
        found = _merged(tallest([*rising.found, *falling.found], arb(0), best, EQUAL_BITS))
        for ceiling, sign in ((rising, 1), (falling, -1)):
            blurred = [patch for patch in ceiling.blurred if not _top(patch, 1, sign) < best]
            ceiling.best = best
            found += self._blur(blurred, ceiling, sign, 1) if blurred else []
        if told and found:
            return first_of([replace(extreme, value=_magnitude(extreme.value)) for extreme in found])
        still = best.is_zero() and told
        return Extreme(Answer.of_exact(0), Answer.of_exact(0)) if still else _below(2 * slack)

    def _search_rates(self, rising: Ceiling, falling: Ceiling, slack: fmpq) -> bool:
        """Search both directions as far as needed; return whether nothing beyond is steeper."""
        done = fmpq(0)
        for stage in (*_STAGES, None):
            best = rising.best.max(falling.best).fmpq()
            if best < slack and stage is None:
                return False
            level = best if best >= slack or stage is None else 2 * slack * dyadic(stage - SLACK)
            until = self._pieces.slow_by(level)
            if until is None:
                raise OutOfWork("from when on the response is slow is not told")
            if until > done:
                rising.over(done, until)
                falling.best = falling.best.max(rising.best)
                falling.over(done, until)
                rising.best = rising.best.max(falling.best)
                done = until
            if best >= slack:
                return True
        return False


def _below(most: fmpq) -> Extreme:
    """Return a magnitude that is at most `most`, whose place is not told."""

    def value(bits: int) -> arb:
        with working_precision(bits):
            return arb(0).union(arb(most))

    return Extreme(Answer.of_ball(value), Answer.undecided("where so small a value is taken is not told"))


def first_of(extremes: Sequence[Extreme]) -> Extreme:
    """Return one extreme for several that are not told apart: the first where they are known to be equal."""
    values = {str(extreme.value.exact) for extreme in extremes}
    known = [extreme for extreme in extremes if extreme.value.exact is not None and extreme.time.exact is not None]
    if len(values) == 1 and len(known) == len(extremes):
        return min(known, key=lambda extreme: extreme.time.exact or fmpq(0))
    return joined(extremes)


def _top(patch: Patch, order: int, sign: int) -> arb:
    low, high = patch.hull(order)
    return high if sign > 0 else -low


def _is_at(extreme: Extreme, value: fmpq) -> bool:
    return extreme.value.exact is not None and extreme.value.exact == value


def _merged(peaks: Sequence[Peak]) -> list[Extreme]:
    """Return peaks as extremes, the two sides of a kink as one."""
    by_time: dict[object, list[Peak]] = {}
    for peak in peaks:
        key = peak.where.time if isinstance(peak.where, Instant) else (id(peak.where),)
        by_time.setdefault(key, []).append(peak)
    return [_both_sides(group) for group in by_time.values()]


def _both_sides(group: Sequence[Peak]) -> Extreme:
    sides = {peak.where.index: peak for peak in group}
    group = list(sides.values())
    first, last = group[0], group[-1]
    if first is not last and first.pieces.jump(last.where.index) != 0:
        extreme = joined([as_extreme(peak) for peak in group])
        return Extreme(extreme.value, as_extreme(first).time)
    return as_extreme(first)


def as_extreme(peak: Peak) -> Extreme:
    """Return a peak as a value and the time at which it is taken."""
    where = peak.where
    if isinstance(where, Instant):
        known = peak.exact
        value = Answer.of_ball(peak.value) if known is None else Answer.of_exact(known)
        return Extreme(value, Answer.of_exact(where.time))
    return Extreme(Answer.of_ball(peak.value), Answer.of_ball(where.enclose))


def _magnitude(value: Answer) -> Answer:
    if value.exact is not None:
        return Answer.of_exact(abs(value.exact))
    return Answer.of_ball(_absolute(value.enclose), value.fragile)


def _absolute(refine: Callable[[int], arb]) -> Callable[[int], arb]:
    def magnitude(bits: int) -> arb:
        ball = refine(bits)
        with working_precision(2 * bits + LOOK):
            return abs(ball)

    return magnitude


def _shifted(extreme: Extreme, offset: fmpq) -> Extreme:
    """Return an extreme with its value moved by a constant."""
    value = extreme.value
    if value.exact is not None:
        return Extreme(Answer.of_exact(value.exact + offset), extreme.time)
    if value.refine is None:
        return extreme

    def refine(bits: int) -> arb:
        ball = value.enclose(bits)
        with working_precision(bits + 32):
            return ball + arb(offset)

    return Extreme(Answer.of_ball(refine, value.fragile), extreme.time)
