"""Overshoot from the phase margin: exp(-pi zeta/sqrt(1 - zeta^2)) with zeta = PM/100 deg.

Two rules, one after the other: the damping ratio is read from the phase margin, and the overshoot from the damping
ratio. Each has its own range, and both have to hold: L near wn^2/(s(s + 2 zeta wn)) with unity feedback, and a pair
that dominates the closed response. Their errors combine: the overshoot of the pair alone is met to -12.3 to +8.1 %,
with other poles and zeros of L ten crossover frequencies away to -14 to +24 %. On other loops the same margin
says little: it does not see zeros of the closed loop, which raise the overshoot without moving a single pole.
"""

from __future__ import annotations

from flint import arb

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.damping_from_phase_margin import damping
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN, combined
from specgate.approximations.near_type_one import stated
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer

_ALONE, _BESIDE = (-123, 81), (-140, 240)
"""Thousandths."""


def _overshoot(features: Features, arguments: Arguments) -> Answer:
    ratio = damping(features)
    if ratio.absent is not None:
        return ratio
    if not ratio.enclose(SHOWN) < 1:
        return Answer.nothing("at a phase margin of 100 deg or more the rule gives no oscillation")
    change = abs((features.steady_gain or 0) * features.subject.size) if arguments.absolute else 1
    return combined(lambda zeta: (-arb.pi() * zeta / (1 - zeta * zeta).sqrt()).exp() * change, ratio)


def _accuracy(features: Features, _: Arguments) -> Accuracy | None:
    return stated(features, _ALONE, _BESIDE)


ROW = Approximation(
    name="overshoot_from_phase_margin",
    title="Overshoot from the phase margin",
    estimates=("overshoot",),
    formula="exp(-pi zeta/sqrt(1 - zeta^2)), zeta = PM/100 deg",
    source="R. C. Dorf, R. H. Bishop, Modern Control Systems, chapter 9; that both have to hold: derived",
    conditions=(),
    evaluate=_overshoot,
    accuracy=_accuracy,
    text=__doc__,
    premises=("damping_from_phase_margin", "second_order_overshoot"),
    alternatives=("second_order_overshoot",),
)
