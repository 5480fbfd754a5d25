"""The error of a formula for a pair over the damping ratio of the pair: what a picture of its range is drawn from."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.approximations.approximation import Approximation
from specgate.approximations.conditions import relative_band
from specgate.approximations.features import Features
from specgate.approximations.pair_measures import of_the_pair
from specgate.approximations.spots import Spot
from specgate.measures.measure import Arguments
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Trilean

_BITS = 48
_STEPS = 50
_LEAST = fmpq(1, 10)
_BESIDE = fmpq(1, 10**6)
"""Distance from a jump of the settling time at which the error is taken on either side."""


@record
class ErrorPoint:
    """The error of the formula for the pair alone, formula / true - 1; holds: whether its own conditions do."""

    damping: fmpq
    error: arb
    holds: bool


@dataclass(frozen=True, eq=False)
class _PairSpot(Spot):
    """The upper pole of s^2 + 2 zeta s + 1, known without looking for it."""

    def at(self, bits: int) -> acb:
        zeta = self.decay.exact
        assert zeta is not None
        with working_precision(bits):
            return acb(-arb(zeta), arb(1 - zeta * zeta).sqrt())


class _PairAlone(Features):
    """A pair of natural frequency 1 and nothing else."""

    def __init__(self, damping: fmpq) -> None:
        denominator = fmpq_poly([1, 2 * damping, 1])
        drawn = Absent("only its closed forms are drawn")
        super().__init__(ResponseSubject(TransferFunction(fmpq_poly([1]), denominator), fmpq(1), drawn, drawn))
        self._pair = _PairSpot(denominator, 1, 0, True, -damping, fmpq(1))

    @cached_property
    def pair(self) -> Spot | None:
        return self._pair

    @cached_property
    def others(self) -> tuple[Spot, ...]:
        return ()

    @cached_property
    def zeros(self) -> tuple[Spot, ...]:
        return ()


def error_over_damping(row: Approximation, arguments: Arguments) -> tuple[ErrorPoint, ...]:
    """Return the error of a formula at damping ratios from 0.1 to 0.98, jumps of the settling time on both sides.

    Empty where the formula has no value or the pair alone none to compare with.
    """
    points = [_point(row, arguments, damping) for damping in sorted(set(_dampings(arguments)))]
    found = [point for point in points if point is not None]
    return tuple(found) if len(found) == len(points) else ()


def _dampings(arguments: Arguments) -> Iterator[fmpq]:
    yield from (fmpq(step, _STEPS) for step in range(1, _STEPS) if fmpq(step, _STEPS) >= _LEAST)
    band = relative_band(arguments)
    if arguments.measure != "settling_time" or band is None or not 0 < band < 1:
        return
    for damping in _jumps(band):
        yield from (damping - _BESIDE, damping + _BESIDE)


def _jumps(band: fmpq) -> Iterator[fmpq]:
    """Yield where a peak k of the pair touches the band, L/sqrt(k^2 pi^2 + L^2), L = ln(1/band), to nine digits."""
    with working_precision(_BITS):
        decades = -arb(band).log()
        for k in range(1, 100):
            touching = decades / ((k * arb.pi()) ** 2 + decades**2).sqrt()
            damping = fmpq((10**9 * touching.mid().fmpq()).floor(), 10**9)
            if damping <= _LEAST:
                return
            if damping < fmpq(_STEPS - 1, _STEPS):
                yield damping


def _point(row: Approximation, arguments: Arguments, damping: fmpq) -> ErrorPoint | None:
    features = _PairAlone(damping)
    value = row.evaluate(features, arguments)
    truth = of_the_pair(features, arguments.measure, arguments)
    if value.absent is not None or truth.absent is not None:
        return None
    holds = all(one.find(features, arguments, one.threshold).holds is Trilean.YES for one in row.conditions)
    return ErrorPoint(damping, _ratio(value, truth), holds)


def _ratio(value: Answer, truth: Answer) -> arb:
    above, below = value.enclose(_BITS), truth.enclose(_BITS)
    with working_precision(_BITS):
        return above / below - 1
