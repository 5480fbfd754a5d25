"""Margins that a sensitivity peak Ms leaves at least: gain Ms/(Ms - 1) up, 1 + 1/Ms down, phase 2 arcsin(1/(2 Ms)).

Ms is the greatest |1/(1 + L)|, so that L never comes nearer to -1 than 1/Ms. From that alone the gain may rise by
Ms/(Ms - 1) and fall by 1 + 1/Ms, and the phase may turn by 2 arcsin(1/(2 Ms)) either way, before L reaches -1. Ms = 2
leaves a factor of 2 (6 dB) and 29 degrees; 45 degrees from Ms alone take Ms <= 1.3066. The usual rule names the rise
only; the fall is a limit of its own where the loop is stable between two gains, and then the nearer one. Where
nothing limits the gain downward, the gain margin is that of a rise.

They are lower bounds, exact where L is nearest to -1 on the axis or on the unit circle, and often far below the truth.
So they can show that a margin is large enough, and never that it is at most so large: as the basis of an `at_most`
claim they are always out of range.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy, Approximation
from specgate.approximations.figures import combined
from specgate.approximations.of_loops import CLOSED_LOOP_STABLE
from specgate.approximations.opened import OpenedLoop
from specgate.measures.measure import Arguments
from specgate.measures.reading import sign_of
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.terms.precision import working_precision

_SOURCE = "S. Skogestad, I. Postlethwaite, Multivariable Feedback Control, 2nd edition, 2005, equation 2.47"
_NOTHING = "a sensitivity peak of this size sets no limit on this side"


def _rise(peak: arb) -> arb:
    return peak / (peak - 1)


def _fall(peak: arb) -> arb:
    return 1 + 1 / peak


def _turn(peak: arb) -> arb:
    return 2 * (1 / (2 * peak)).asin()


_BOUNDS: Mapping[str, tuple[Callable[[arb], arb], fmpq]] = {
    "gain_margin_up": (_rise, fmpq(1)),
    "gain_margin_down": (_fall, fmpq(0)),
    "phase_margin": (_turn, fmpq(1, 2)),
    "phase_margin_lag": (_turn, fmpq(1, 2)),
    "phase_margin_lead": (_turn, fmpq(1, 2)),
}
"""The bound as a function of Ms, and above which Ms it is one: below, nothing is used up on this side."""


def _least(opened: OpenedLoop, arguments: Arguments) -> Answer:
    loop = opened.loop
    if loop is None:
        return Answer.undecided("the sensitivity of this loop is not answered by this version")
    try:
        peak = loop.sensitivity_peak(arguments.over)
        measure = arguments.measure or "gain_margin"
        if measure == "gain_margin":
            limited = loop.gain_margin_down(arguments.over).absent
            measure = "gain_margin_up" if limited is not None and limited.infinite else "gain_margin_down"
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)
    return peak if peak.absent is not None else _bound(peak, *_BOUNDS[measure])


def _bound(peak: Answer, of: Callable[[arb], arb], above: fmpq) -> Answer:
    def excess(bits: int) -> arb:
        ball = peak.enclose(bits)
        with working_precision(bits):
            return ball - above

    sign = sign_of(excess)
    if sign is None:
        return Answer.undecided("whether the sensitivity peak exceeds one is not told")
    return combined(of, peak) if sign > 0 else Answer.nothing(_NOTHING, infinite=True)


ROW = Approximation(
    name="margins_from_sensitivity",
    title="Least margins from the sensitivity peak",
    estimates=(
        "gain_margin",
        "phase_margin",
        "gain_margin_up",
        "gain_margin_down",
        "phase_margin_lag",
        "phase_margin_lead",
    ),
    formula="gain at least Ms/(Ms - 1) up and 1 + 1/Ms down, phase at least 2 arcsin(1/(2 Ms))",
    source=f"{_SOURCE}; the fall of the gain: derived",
    conditions=(CLOSED_LOOP_STABLE,),
    evaluate=_least,
    accuracy=lambda _, __: Accuracy(
        fmpq(-1), fmpq(0), "a lower bound: the truth is never below it, and may be far above"
    ),
    text=__doc__,
    always_safe="under",
)
