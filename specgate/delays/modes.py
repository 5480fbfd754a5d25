"""Decay, damping and natural frequency of the modes of a loop with dead time, of which there are endlessly many.

All poles in a disc |p| < r are known, or all right of a line Re s = -g: every other one has |p| >= r, or decays at g at
least and has |p| >= g. So
- the slowest mode is among those right of a line as soon as there are any;
- a natural frequency that is the least of the known ones, and less than r or g, is the least of all;
- a range of |p| that ends before r or g is known as a whole;
- a damping ratio -Re p/|p| over a range of |p| up to h is at least g/h for those left of a line.
Without a range there is no least damping ratio: modes of ever higher frequency decay faster, and yet their damping
tends to zero (retarded type: Re p grows like the logarithm of |p|).
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Literal

from flint import acb, arb, fmpq, fmpq_poly

from specgate.delays.footing import radius_at
from specgate.delays.modal import Poles, poles_right_of, poles_within, suitable_lines
from specgate.delays.recording import LEAST, NEAREST
from specgate.delays.transform import Transform
from specgate.response.accounts import Account, Footing
from specgate.response.answers import Answer
from specgate.systems.delayed import DelayedSolution
from specgate.systems.quasi import Quasi
from specgate.terms.precision import HIGHEST, working_precision
from specgate.terms.records import record

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
_ROOTS = "the characteristic quasi-polynomial; its roots isolated by interval Newton, counted by the change of argument"
_SHOWN = 64
_RADIANS = 60
"""Radius of a disc times the longest delay that is worth a search."""

_RADII = (1, 2, 3, 4, 6, 8, 12, 16, 24, 32)
"""Radii, in parts of the longest delay, within which a least natural frequency is looked for."""

_BEYOND = (fmpq(65, 64), fmpq(33, 32), fmpq(9, 8))
"""Radii, in parts of the end of a range: a pole may lie on one circle."""

_CHAIN = (
    "a dead time passes high frequencies round the loop as they are: the decay rates of its modes of ever higher "
    "frequency tend to a limit, and whether one of them is the slowest is not told"
)
_NOT_FOUND = "which modes of the loop are the slowest was not proved within the work limit"


def least_over_late_modes(solution: DelayedSolution, figure: Figure, over: tuple[fmpq, fmpq] | None) -> Answer:
    """Return the least figure over the modes of a loop, in a range of |p| if one is given."""
    if figure == "damping_ratio" and over is None:
        return Answer.undecided(_ENDLESS)
    whole = Quasi.rational(fmpq_poly([1]))
    transform = Transform(whole, solution.determinant, solution.factors, fmpq_poly([1]))
    for region in _regions(transform, figure, over):
        found = _among(transform, region, figure, over)
        if found is not None:
            return found
    below = transform.denominator
    endless = any(p.degree() == below.undelayed.degree() for _, p in below.delayed)
    return Answer.undecided(_CHAIN if endless else _NOT_FOUND)


@record
class _Region:
    """Known poles; of all others |p| is not below `far`, nor the decay rate below `decay` (None: not told)."""

    poles: Poles
    far: fmpq
    decay: fmpq | None


def _regions(transform: Transform, figure: Figure, over: tuple[fmpq, fmpq] | None) -> Iterator[_Region]:
    """Yield regions whose poles are all found, those first that cost least and tell most."""
    longest = transform.denominator.delayed[-1][0]
    if over is not None:
        radii = [over[1] * part for part in _BEYOND]
    else:
        radii = [part / longest for part in _RADII] if figure == "natural_frequency" else []
    for radius in radii:
        within = poles_within(transform, radius) if radius * longest <= _RADIANS else None
        if within is not None:
            yield _Region(within, radius, None)
    far = list(suitable_lines(transform))
    for left in reversed(far) if far else suitable_lines(transform, near=True):
        right = poles_right_of(transform, left)
        if right is not None:
            yield _Region(right[0], -left, -left)


def _among(transform: Transform, region: _Region, figure: Figure, over: tuple[fmpq, fmpq] | None) -> Answer | None:
    """Return the answer if the known poles tell it."""
    poles, complete = region.poles, over is not None and over[1] < region.far
    picked = [_counts(transform, poles, index, figure, over) for index in range(len(poles.at(transform, 64)))]
    if None in picked:
        return None
    if not any(picked):
        return Answer.nothing("the loop has no such mode in this range of frequencies") if complete else None

    def refine(bits: int) -> arb:
        found = poles.at(transform, bits + 16)
        with working_precision(bits + 16):
            values = [_OF[figure](pole) for pole, counts in zip(found, picked, strict=True) if counts]
            least = values[0]
            for value in values[1:]:
                least = least.min(value)
            return least

    limit = region.far if figure == "natural_frequency" else region.decay
    if figure == "damping_ratio" and limit is not None and over is not None:
        limit = limit / over[1]
    if not (complete or (limit is not None and refine(64) < arb(limit))):
        return None
    return Answer.of_ball(refine).accounted(lambda: _account(transform, region, sum(map(bool, picked))))


def _account(transform: Transform, region: _Region, picked: int) -> Account:
    """Say which poles a figure was taken over; `picked`: how many different ones."""
    found = region.poles.with_multiplicities(transform, _SHOWN)
    footing = Footing(_ROOTS, region.poles.count, radius_at([pole for pole, _ in found], _SHOWN), _SHOWN)
    return Account(
        LEAST if region.decay is not None else NEAREST, footing, counts={"different poles that count": picked}
    )


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
