"""Damping ratio of a loop from its phase margin: zeta = PM/100 deg.

For L = wn^2/(s(s + 2 zeta wn)) the phase margin is a function of the damping ratio alone, and nearly straight up to
60 degrees: the rule is 2 % low at most (zeta = 0.61) and 14.6 % high for very light damping. Beyond it bends: at
zeta = 0.9 the margin is 73.5 degrees. Further poles and zeros of L turn both together as long as they are far beyond
the crossover; a loop that is not of this kind may have any damping at 60 degrees: a resonance beyond the crossover
that just stays below one keeps its own. The damping ratio is that of the least damped mode of the whole loop.
"""

from __future__ import annotations

from flint import arb

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.figures import combined
from specgate.approximations.near_type_one import CONDITIONS, phase_margin, stated
from specgate.approximations.viewed import Viewed
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_ALONE, _BESIDE = (-21, 146), (-56, 158)
"""Thousandths."""


def damping(viewed: Viewed) -> Answer:
    """Return the damping ratio that the rule gives, or why there is none."""
    margin = phase_margin(viewed)
    return margin if margin.absent is not None else combined(lambda turn: turn * 9 / (5 * arb.pi()), margin)


def _damping(viewed: Viewed, _: Arguments) -> Answer:
    return damping(viewed)


def _accuracy(viewed: Viewed, arguments: Arguments) -> Accuracy | None:
    return stated(viewed, _ALONE, _BESIDE) if arguments.over is None else None


ROW = Approximation(
    name="damping_from_phase_margin",
    title="Damping ratio from the phase margin",
    estimates=("damping_ratio",),
    formula="PM/100 deg",
    source="R. C. Dorf, R. H. Bishop, Modern Control Systems, chapter 9",
    conditions=CONDITIONS,
    evaluate=_damping,
    accuracy=_accuracy,
    text=__doc__,
)
