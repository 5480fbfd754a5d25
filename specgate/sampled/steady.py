"""Steady states of a sampled loop, exactly: the sampled final value theorem as a linear system of rationals.

In a steady state every signal is constant: 0 = A z + B v between the samples, q = A q + B e and v = C q + D e at them.
A constant state of the period map is one of these and the other way round: over one period of constant v the moving
states return to where they were if and only if S (A z + B v) = 0, S being the integral of e^(A t) over the period. S is
singular only where A has a mode that turns a whole number of times in a period and is not seen by the samples; such a
mode never decays, and then nothing is asked here. So z = 1 is a mode of the loop if and only if the matrix of these
equations is singular, and otherwise its solution is where the loop comes to rest, if it does.
"""

from __future__ import annotations

from flint import fmpq, fmpq_mat

from specgate.sampled.cycle import Cycle
from specgate.sampled.state_space import Row, identity, of_rows


def equations(cycle: Cycle) -> fmpq_mat:
    """Return the matrix of the steady state over (z, q, v)."""
    motion, law = cycle.motion, cycle.law
    size = motion.order + law.order + int(law.d.nrows())
    forced, direct = motion.b * cycle.spread, motion.d * cycle.spread
    between = _joined(motion.a, fmpq_mat(motion.order, law.order), forced)
    inside = _joined(law.b * motion.c, law.a - identity(law.order), law.b * direct)
    answer = _joined(law.d * motion.c, law.c, law.d * direct - identity(int(law.d.nrows())))
    return of_rows([*between, *inside, *answer], size)


def has_mode_at_one(cycle: Cycle) -> bool:
    """Whether z = 1 is a mode of the loop (an integrator that nothing holds)."""
    matrix = equations(cycle)
    return bool(matrix.nrows()) and matrix.det() == 0


def steady_state(cycle: Cycle, drive: fmpq_mat, seen: fmpq_mat) -> tuple[Row, Row, Row]:
    """Return the moving states, those of the controllers and their outputs at rest under a constant input.

    drive: column by which the input drives the moving states. seen: column by which the samplers see it. z = 1 must be
    no mode of the loop.
    """
    motion, law = cycle.motion, cycle.law
    right = fmpq_mat([*(-drive).tolist(), *(-(law.b * seen)).tolist(), *(-(law.d * seen)).tolist()])
    if not right.nrows():
        return [], [], []
    found = [row[0] for row in equations(cycle).solve(right).tolist()]
    inside = motion.order + law.order
    return found[: motion.order], found[motion.order : inside], found[inside:]


def _joined(*parts: fmpq_mat) -> list[list[fmpq]]:
    return [[entry for row in rows for entry in row] for rows in zip(*(part.tolist() for part in parts), strict=True)]
