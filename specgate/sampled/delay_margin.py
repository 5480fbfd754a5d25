"""The dead time that a sampled loop stands: how much later its held output may arrive before the loop is unstable.

A dead time of a part of a period is no lag of L(z): it makes another pulse transfer function. So the delay d = n T + e
of the output goes into the loop itself, e being a ball: the characteristic polynomial then encloses those for all
delays in a stretch, and Routh's array in balls proves all of them stable at once. Stretch after stretch is proved from
zero on; where a delay is proved not to be stable, the margin lies between, and both ends are moved towards each other.
With whole periods the polynomial is z^n D(z) + N(z), D without and D + N with the answer to what is held at n = 0.
e = 0 and e = T belong to both neighbouring n: what is held for no time does not matter.
"""

from __future__ import annotations

from flint import arb, arb_mat, arb_poly, fmpq, fmpq_mat

from specgate.response.answers import Answer
from specgate.sampled.circle import in_w_padded
from specgate.sampled.components import Component
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.spread import Spread, is_hurwitz
from specgate.sampled.state_space import StateSpace, of_rows
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

_TABLES = 400
_LONGEST = 60
_FINEST = fmpq(1, 1 << 14)


def delay_margin(component: Component) -> Answer:
    """Return the least dead time (s) that makes a stable loop with a single held output unstable."""
    found = _single(component)
    if found is None:
        return Answer.undecided("several outputs are held in this loop: which of them arrives late is not told")
    search = _Search(*found, component.period)
    low, high = search.bracket()
    if high is None:
        least = int(low.p) / int(low.q)
        return Answer.undecided(
            f"the loop stands {least:.4g} s at least; how much more is not told within the work limit"
        )
    ends = [low, high]

    def refine(bits: int) -> arb:
        ends[:] = search.closer(ends[0], ends[1], bits)
        with working_precision(bits + 16):
            return arb(ends[0]).union(arb(ends[1]))

    return Answer(Proof.ENCLOSED, refine=refine)


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


def _zero(matrix: fmpq_mat) -> fmpq_mat:
    return fmpq_mat(int(matrix.nrows()), int(matrix.ncols()))


class _Search:
    def __init__(self, motion: StateSpace, law: StateSpace, delay: fmpq, period: fmpq) -> None:
        self._motion, self._law, self._delay, self._period = motion, law, delay, period
        # the fraction stands for any: only what moves over the rest of the period depends on it
        self._cycle = Cycle(motion, [Controller(law, period / 2)], period)
        self._silent = Cycle(
            StateSpace(motion.a, _zero(motion.b), motion.c, _zero(motion.d)), [Controller(law, period / 2)], period
        )
        self._known: dict[int, _Family] = {}
        self._tables = 0

    def bracket(self) -> tuple[fmpq, fmpq | None]:
        """Return a time up to which the loop is proved stable, and a later one at which it is proved not to be."""
        time, step = fmpq(0), self._period / 8
        while self._tables < _TABLES and time < _LONGEST * self._period and step >= self._period * _FINEST:
            end = min(time + step, self._boundary(time) - self._delay)
            if self._stable(time, end, 128):
                time, step = end, min(2 * step, self._period / 2)
                continue
            # a stretch is proved only if it is short beside its distance from the limit: look for that further ahead
            beyond = next(
                (late for late in (end, time + 4 * step, time + 16 * step) if self._unstable(late, 128)), None
            )
            if beyond is not None:
                return time, beyond
            step = step / 2
        return time, None

    def closer(self, low: fmpq, high: fmpq, bits: int) -> tuple[fmpq, fmpq]:
        """Move both ends of a bracket towards each other until it has so many bits, as far as the work limit goes."""
        self._tables = 0
        while high - low > high * fmpq(1, 1 << bits) and self._tables < _TABLES:
            step, moved = (high - low) / 2, False
            for _ in range(40):
                middle = min(low + step, self._boundary(low) - self._delay)
                if self._stable(low, middle, 2 * bits + 128):
                    low, moved = middle, True
                    break
                if self._unstable(middle, 2 * bits + 128):
                    high, moved = middle, True
                    break
                step = step / 2
            if not moved:
                break
        return low, high

    def _boundary(self, time: fmpq) -> fmpq:
        """Return the next whole number of periods after a whole delay."""
        return ((self._delay + time) / self._period).floor() * self._period + self._period

    def _stable(self, low: fmpq, high: fmpq, bits: int) -> bool:
        with working_precision(bits):
            span = arb(low + self._delay).union(arb(high + self._delay))
        return self._told(low, span, bits) is True

    def _unstable(self, time: fmpq, bits: int) -> bool:
        with working_precision(bits):
            delay = arb(time + self._delay)
        return self._told(time, delay, bits) is False

    def _told(self, time: fmpq, delay: arb, bits: int) -> bool | None:
        """Whether every root is inside, of every delay in a ball within one period."""
        self._tables += 1
        whole = int(((self._delay + time) / self._period).floor())
        precision = bits + 8 * whole
        with working_precision(precision):
            left = arb(self._period * (whole + 1)) - delay
        family = self._family(precision)
        middle, slope = family.over(left)
        with working_precision(precision):
            middle = family.opened * arb_poly([*([0] * whole), 1]) + middle
            degree = whole + family.opened.degree()
            away = left - left.mid()
            pairs = zip(in_w_padded(middle, degree, precision), in_w_padded(slope, degree, precision), strict=True)
            return is_hurwitz([Spread(value, change, away) for value, change in pairs])

    def _family(self, bits: int) -> _Family:
        if bits not in self._known:
            self._known[bits] = _Family(self._cycle, self._silent, self._motion, self._period, bits)
        return self._known[bits]


class _Family:
    """N(z) of all fractions of a period, by what is left of the period once the output arrives.

    With g the answer of the moving states to one that is held over the rest of the period, x[k + 1] is F x + G old
    + g (new - old). So the characteristic polynomial is affine in g (a change of rank one).
    """

    def __init__(self, cycle: Cycle, silent: Cycle, motion: StateSpace, period: fmpq, bits: int) -> None:
        self._motion, self._bits, self._order = cycle, bits, motion.order
        old, new = (arb_mat(stretch.held) for stretch in cycle.stretches)
        with working_precision(bits):
            self.opened: arb_poly = silent.enclosed(bits).charpoly()
            whole = cycle.motion_over(period, bits).tolist()[: self._order]
            rows = [list(row) for row in cycle.enclosed(bits).tolist()]
            for i in range(self._order):
                for j in range(cycle.order):
                    own = whole[i][j] if j < self._order else arb(0)
                    rows[i][j] = own + whole[i][self._order] * old[0, j]
            base = arb_mat(rows).charpoly()
            self._base: arb_poly = base - self.opened
            self._parts: list[arb_poly] = []
            for i in range(self._order):
                moved = [list(row) for row in rows]
                moved[i] = [entry + new[0, j] - old[0, j] for j, entry in enumerate(moved[i])]
                self._parts.append(arb_mat(moved).charpoly() - base)

    def over(self, left: arb) -> tuple[arb_poly, arb_poly]:
        """Return N in the middle of a ball of what is left of the period, and its slope over the ball."""
        bits = self._bits
        with working_precision(bits):
            middle = left.mid()
        at, slope = self._answers(middle)[0], self._answers(left)[1]
        with working_precision(bits):
            total, rate = self._base, arb_poly([0])
            for value, change, part in zip(at, slope, self._parts, strict=True):
                total, rate = total + part * value, rate + part * change
            return total, rate

    def _answers(self, left: arb) -> tuple[list[arb], list[arb]]:
        """Return g and its derivative at (a ball of) times: A g + B follows from g' = e^(At) B."""
        motion = self._motion.motion
        moved = self._motion.motion_over(left, self._bits)
        with working_precision(self._bits):
            value = [moved[i, self._order] for i in range(self._order)]
            own = arb_mat([list(row)[: self._order] for row in moved.tolist()[: self._order]])
            slope = (own * arb_mat(motion.b)).entries() if self._order else []
        return value, list(slope)
