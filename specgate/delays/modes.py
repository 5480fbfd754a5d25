"""Decay, damping and natural frequency of the modes of a loop with dead time, of which there are endlessly many.

All poles right of a line Re s = -g are known; every other one decays at g at least and has |p| >= g. So
- the slowest mode is among the known ones as soon as there are any;
- a natural frequency of at most g that is the least of the known ones is the least of all;
- a damping ratio -Re p/|p| over a range of |p| up to h is at least g/h for the others.
Without a range there is no least damping ratio: modes of ever higher frequency decay faster, and yet their damping
tends to zero (retarded type: Re p grows like the logarithm of |p|).
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Literal

from flint import acb, arb, fmpq, fmpq_poly

from specgate.delays.footing import radius_at
from specgate.delays.modal import Poles, poles_right_of, suitable_lines
from specgate.delays.recording import LEAST
from specgate.delays.transform import Transform
from specgate.response.accounts import Account, Footing
from specgate.response.answers import Answer
from specgate.systems.delayed import DelayedSolution
from specgate.systems.quasi import Quasi
from specgate.terms.precision import HIGHEST, working_precision

Figure = Literal["decay_rate", "natural_frequency", "damping_ratio"]

_OF: dict[Figure, Callable[[acb], arb]] = {
    "decay_rate": lambda pole: -pole.real,
    "natural_frequency": abs,
    "damping_ratio": lambda pole: -pole.real / abs(pole),
}

_ENDLESS = (
    "a dead time in the loop has modes of ever higher frequency, whose damping ratio tends to zero though they decay "
    "ever faster: ask for a range of frequencies (`over`)"
)
_ROOTS = "the characteristic quasi-polynomial; its roots isolated by interval Newton, counted along a vertical line"
_SHOWN = 64
_NOT_FOUND = "which modes of the loop are the slowest was not proved within the work limit"


def least_over_late_modes(solution: DelayedSolution, figure: Figure, over: tuple[fmpq, fmpq] | None) -> Answer:
    """Return the least figure over the modes of a loop, in a range of |p| if one is given."""
    if figure == "damping_ratio" and over is None:
        return Answer.undecided(_ENDLESS)
    whole = Quasi.rational(fmpq_poly([1]))
    transform = Transform(whole, solution.determinant, solution.factors, fmpq_poly([1]))
    far = list(suitable_lines(transform))
    for left in reversed(far) if far else suitable_lines(transform, near=True):
        poles = poles_right_of(transform, left)
        if poles is None:
            continue
        found = _among(transform, poles, figure, over)
        if found is not None:
            return found
    return Answer.undecided(_NOT_FOUND)


def _among(transform: Transform, poles: Poles, figure: Figure, over: tuple[fmpq, fmpq] | None) -> Answer | None:
    """Return the answer if the poles right of a line tell it."""
    reach = -poles.line.real
    picked = [_counts(transform, poles, index, figure, over) for index in range(len(poles.at(transform, 64)))]
    if None in picked:
        return None
    if not any(picked):
        beyond = over is not None and over[1] < reach
        return Answer.nothing("the loop has no such mode in this range of frequencies") if beyond else None

    def refine(bits: int) -> arb:
        found = poles.at(transform, bits + 16)
        with working_precision(bits + 16):
            values = [_OF[figure](pole) for pole, counts in zip(found, picked, strict=True) if counts]
            least = values[0]
            for value in values[1:]:
                least = least.min(value)
            return least

    limit = reach if over is None or figure != "damping_ratio" else reach / over[1]
    told = figure == "decay_rate" or bool(refine(64) < arb(limit)) or (over is not None and over[1] < reach)
    return (
        Answer.of_ball(refine).accounted(lambda: _account(transform, poles, sum(map(bool, picked)))) if told else None
    )


def _account(transform: Transform, poles: Poles, picked: int) -> Account:
    """Say which poles a figure was taken over; `picked`: how many different ones."""
    found = poles.with_multiplicities(transform, _SHOWN)
    radius = radius_at([pole for pole, _ in found], _SHOWN)
    footing = Footing(_ROOTS, poles.line.count, radius, _SHOWN)
    return Account(LEAST, footing, counts={"different poles that count": picked})


def _counts(
    transform: Transform, poles: Poles, index: int, figure: Figure, over: tuple[fmpq, fmpq] | None
) -> bool | None:
    """Return whether a pole counts; None where it is not told."""
    pole = poles.at(transform, 64)[index]
    if figure == "natural_frequency" and pole.imag.is_zero():
        return False
    if figure == "damping_ratio" and pole.is_zero():
        return False
    if over is None:
        return True
    bits = 64
    while bits <= HIGHEST:
        size = abs(poles.at(transform, bits)[index])
        if size < arb(over[0]) or size > arb(over[1]):
            return False
        if size >= arb(over[0]) and size <= arb(over[1]):
            return True
        bits *= 4
    return None
