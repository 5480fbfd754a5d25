"""The characteristic polynomial of a loop with one held output, for every delay of that output.

With the delay n T + e it is z^n D(z) + N(z, e), D without an answer to what is held. e is the only thing that
exponentials depend on, by what is left of the period once the output arrives.
"""

from __future__ import annotations

from flint import arb, arb_mat, arb_poly, fmpq, fmpq_mat

from specgate.sampled.circle import in_w_padded
from specgate.sampled.cycle import Controller, Cycle
from specgate.sampled.state_space import StateSpace
from specgate.terms.precision import working_precision

_TERMS = 5


def family(motion: StateSpace, law: StateSpace, period: fmpq, bits: int, *, unit_at_one: bool) -> Family:
    """Return the polynomials of a loop at a precision; motion has one input."""
    # the fraction stands for any: only what moves over the rest of the period depends on it
    controllers = [Controller(law, period / 2)]
    silent = StateSpace(motion.a, _zero(motion.b), motion.c, _zero(motion.d))
    found = Family(Cycle(motion, controllers, period), Cycle(silent, controllers, period), motion, period, bits)
    found.unit_at_one = unit_at_one
    return found


def _zero(matrix: fmpq_mat) -> fmpq_mat:
    return fmpq_mat(int(matrix.nrows()), int(matrix.ncols()))


class Family:
    """D and N of all fractions of a period, in w, by what is left of the period once the output arrives.

    opened: the coefficients of (1 - w)^m D, lowest first, as those of N are. unit_at_one: whether N(1) = D(1) exactly.

    With g the answer of the moving states to one that is held over the rest of the period, x[k + 1] is F x + G old
    + g (new - old). So the characteristic polynomial is affine in g (a change of rank one).
    """

    def __init__(self, cycle: Cycle, silent: Cycle, motion: StateSpace, period: fmpq, bits: int) -> None:
        self._motion, self._order = cycle, motion.order
        self.bits, self.period, self.unit_at_one = bits, period, False
        with working_precision(bits):
            old, new = (arb_mat(stretch.held) for stretch in cycle.stretches)
            opened: arb_poly = silent.enclosed(bits).charpoly()
            whole = cycle.motion_over(period, bits).tolist()[: self._order]
            rows = [list(row) for row in cycle.enclosed(bits).tolist()]
            for i in range(self._order):
                for j in range(cycle.order):
                    own = whole[i][j] if j < self._order else arb(0)
                    rows[i][j] = own + whole[i][self._order] * old[0, j]
            base = arb_mat(rows).charpoly()
            answers = [base - opened]
            for i in range(self._order):
                moved = [list(row) for row in rows]
                moved[i] = [entry + new[0, j] - old[0, j] for j, entry in enumerate(moved[i])]
                answers.append(arb_mat(moved).charpoly() - base)
        degree = max(p.degree() for p in (opened, *answers))
        self.opened = in_w_padded(opened, degree, bits)
        # in w before anything is put together: what is the same for all delays, as N(1), then cancels term by term
        self._base, *self._parts = (in_w_padded(p, degree, bits) for p in answers)

    def over(self, left: arb) -> tuple[list[arb], list[arb]]:
        """Return N over a ball of what is left of the period, and its slope over the ball: coefficients in w.

        By Taylor's series about the middle; its last term is taken over the whole ball.
        """
        with working_precision(self.bits):
            middle, away = left.mid(), left - left.mid()
        near, far = self._answers(middle), self._answers(left)
        with working_precision(self.bits):
            value, slope, factor, before = list(self._base), [arb(0)] * len(self._base), arb(1), arb(0)
            for k, answers in enumerate([*near[:-1], far[-1]]):
                if k:
                    before, factor = factor, factor * away / k
                for j in range(len(value)):
                    term = sum((part[j] * g for g, part in zip(answers, self._parts, strict=True)), arb(0))
                    value[j], slope[j] = value[j] + term * factor, slope[j] + term * before
            return value, slope

    def _answers(self, left: arb) -> list[list[arb]]:
        """Return g and its derivatives at (a ball of) times: g' = e^(At) B."""
        motion = self._motion.motion
        moved = self._motion.motion_over(left, self.bits)
        with working_precision(self.bits):
            found = [[moved[i, self._order] for i in range(self._order)]]
            if self._order:
                own = arb_mat([list(row)[: self._order] for row in moved.tolist()[: self._order]])
                rate, power = own * arb_mat(motion.b), arb_mat(motion.a)
                for _ in range(_TERMS):
                    found.append(rate.entries())
                    rate = power * rate
            return found
