"""Measures of all modes of a loop: its stability, its hidden modes, and where its poles lie."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING

from flint import acb, arb, fmpq, fmpq_poly

from specgate.measures.measure import Argument, Arguments, Comparer, Measure, Reader, UnitRule
from specgate.measures.reading import decided
from specgate.measures.subjects import LoopSubject
from specgate.response.accounts import Account, Footing, radius_of
from specgate.response.answers import Answer
from specgate.sampled.modes import is_at_one, is_dead, least_over_modes, oscillates
from specgate.sampled.solution import SampledSolution
from specgate.systems.delayed import DelayedSolution
from specgate.systems.regions import (
    Sign,
    compare_damping_ratio,
    compare_decay_rate,
    compare_natural_frequency,
)
from specgate.systems.ring import in_ring
from specgate.systems.roots import Root, certified_roots
from specgate.systems.solution import LoopSolution
from specgate.terms.precision import HIGHEST, working_precision

if TYPE_CHECKING:
    from specgate.delays.modes import Figure

_SHOWN = 128
_CHARACTERISTIC = "the poles of the loop: all roots of det P(s) as wired, certified"
_NO_POLES = "the loop has no dynamics: there is no pole"


def _well_posed(read: Reader) -> Reader:
    """Leave every question open on a loop whose signals are not determined."""

    def reader(subject: LoopSubject, arguments: Arguments) -> Answer:
        if subject.solution.algebraic_loop is not None:
            return Answer.undecided(subject.solution.algebraic_loop.reason)
        return read(subject, arguments)

    return reader


def _stable(subject: LoopSubject, _: Arguments) -> Answer:
    return decided(subject.solution.stable)


def _at_limit(compare: Callable[[fmpq_poly, fmpq], Sign | None]) -> Comparer:
    def comparer(subject: LoopSubject, arguments: Arguments, limit: fmpq) -> Sign | None:
        if arguments.over is not None:
            return None  # the predicates are about all poles
        solution = subject.solution
        modes = None if isinstance(solution, SampledSolution) else _polynomial(solution)
        return None if modes is None else compare(modes, limit)

    return comparer


def _over_poles(
    subject: LoopSubject,
    arguments: Arguments,
    of: Callable[[acb], arb],
    which: Callable[[acb], bool],
    reason: str,
) -> Answer:
    """Return the smallest value of `of` over the poles that `which` picks, or `reason` where there is none.

    A range of frequencies picks the poles p with low <= |p| <= high.
    """
    solution = subject.solution
    if isinstance(solution, SampledSolution):
        if arguments.over is not None:
            return Answer.undecided("a range (`over`) of the modes of a sampled loop is not answered by this version")
        return least_over_modes(solution, of, _OF_SAMPLED[which], reason)
    polynomial = _polynomial(solution)
    if polynomial is None:
        from specgate.delays.modes import least_over_late_modes

        assert isinstance(solution, DelayedSolution)
        return least_over_late_modes(solution, _FIGURE[which], arguments.over)
    picked = _picked(polynomial, arguments.over, which)
    if picked is None:
        return Answer.undecided(f"it is not told at {HIGHEST} bits which poles lie in the range")
    if not any(picked):
        return Answer.nothing(reason if arguments.over is None else f"in this range of frequencies, {reason}")

    def refine(bits: int) -> arb:
        poles = [root.value for root in certified_roots(polynomial, bits + 16)]
        with working_precision(bits + 16):
            first, *rest = (of(pole) for pole, counts in zip(poles, picked, strict=True) if counts)
            for value in rest:
                first = first.min(value)
            return first

    return Answer.of_ball(refine).accounted(lambda: _account(polynomial, sum(picked)))


def _account(polynomial: fmpq_poly, picked: int) -> Account:
    """Say which poles a figure was taken over; `picked`: how many different ones."""
    roots = certified_roots(polynomial, _SHOWN)
    radius = max(radius_of(root.value.real, root.value.imag) for root in roots)
    footing = Footing(_CHARACTERISTIC, sum(root.multiplicity for root in roots), radius, _SHOWN)
    return Account("the least over the poles that count", footing, counts={"different poles that count": picked})


def _polynomial(solution: LoopSolution | DelayedSolution) -> fmpq_poly | None:
    """Return the characteristic polynomial; None where a dead time in a loop makes it none."""
    return solution.determinant.polynomial if isinstance(solution, DelayedSolution) else solution.determinant


def _picked(
    polynomial: fmpq_poly, over: tuple[fmpq, fmpq] | None, which: Callable[[acb], bool]
) -> tuple[bool, ...] | None:
    """Return of each pole whether it counts; None if not decided."""
    fitting = tuple(which(root.value) for root in certified_roots(polynomial, 64))
    if over is None:
        return fitting
    inside = in_ring(polynomial, *over)
    return None if inside is None else tuple(one and other for one, other in zip(fitting, inside, strict=True))


def _away_from_origin(pole: acb) -> bool:
    return not pole.is_zero()


def _oscillatory(pole: acb) -> bool:
    return not pole.imag.is_zero()


def _any(_: acb) -> bool:
    return True


_OF_SAMPLED: Mapping[Callable[[acb], bool], Callable[[Root], bool]] = {
    _away_from_origin: lambda root: not is_dead(root) and not is_at_one(root),
    _oscillatory: oscillates,
    _any: lambda root: not is_dead(root),
}
"""The same choices over modes in z."""


_FIGURE: Mapping[Callable[[acb], bool], Figure] = {
    _away_from_origin: "damping_ratio",
    _oscillatory: "natural_frequency",
    _any: "decay_rate",
}
"""The same figures of a loop with dead time."""


def _damping(pole: acb) -> arb:
    return -pole.real / abs(pole)


def _damping_ratio(subject: LoopSubject, given: Arguments) -> Answer:
    return _over_poles(subject, given, _damping, _away_from_origin, "the loop has no pole away from the origin")


def _natural_frequency(subject: LoopSubject, given: Arguments) -> Answer:
    return _over_poles(subject, given, abs, _oscillatory, "the loop has no oscillating mode (no complex pair of poles)")


def _decay_rate(subject: LoopSubject, given: Arguments) -> Answer:
    return _over_poles(subject, given, lambda pole: -pole.real, _any, _NO_POLES)


_RANGE = (
    Argument(
        "over", "range", "range of frequencies: only poles p with |p| in it count, its ends included; all unless given"
    ),
)
_ROOTS = (
    "enclosed: certified roots of det P(s); with dead time its proved rightmost ones; of a sampled loop those in z, "
    "said in s"
)

ROWS = (
    Measure(
        name="stable",
        title="Stable",
        subjects=("loop",),
        unit=UnitRule.YES_NO,
        definition=(
            "Whether every mode of the loop decays: all roots of its characteristic polynomial, cancelled ones "
            "included, lie strictly left of the imaginary axis."
        ),
        absent_when="the loop has an algebraic loop: its signals are not determined",
        source="IEC 60050-351:2013, 351-42-21 (asymptotic stability), of the loop with all its modes",
        method=(
            "exact: Routh's array in integers on det P(s) as wired, never reduced; with dead time the roots right of "
            "the axis are counted in balls; of a sampled loop Routh's array in balls after the bilinear map"
        ),
        read=_well_posed(_stable),
        always=True,
    ),
    Measure(
        name="damping_ratio",
        title="Damping ratio",
        subjects=("loop",),
        unit=UnitRule.RATIO,
        definition=(
            "The smallest damping ratio -Re p/|p| of any pole p of the loop: that of the least damped mode. One for a "
            "real stable pole, negative for a growing mode; a pole at the origin has none and is left out."
        ),
        absent_when="the loop has no pole away from the origin",
        source="IEC 60050-351:2013, 351-45-19 (damping ratio), of the least damped mode",
        method=_ROOTS,
        read=_well_posed(_damping_ratio),
        at_limit=_at_limit(compare_damping_ratio),
        arguments=_RANGE,
        signed=True,
        always=True,
    ),
    Measure(
        name="natural_frequency",
        title="Natural frequency",
        subjects=("loop",),
        unit=UnitRule.RADIAN_PER_SECOND,
        definition=(
            "The smallest undamped natural frequency |p| of any complex pair of poles p of the loop: that of its "
            "slowest oscillating mode. Real poles are no oscillation and do not count; see decay_rate."
        ),
        absent_when="the loop has no complex pair of poles",
        source="characteristic angular frequency of a second-order lag element, IEC 60050-351:2013, 351-50-03",
        method=_ROOTS,
        read=_well_posed(_natural_frequency),
        at_limit=_at_limit(compare_natural_frequency),
        arguments=_RANGE,
        always=True,
    ),
    Measure(
        name="decay_rate",
        title="Decay rate",
        subjects=("loop",),
        unit=UnitRule.PER_SECOND,
        definition=(
            "The smallest -Re p of any pole p of the loop: the rate at which its slowest mode decays, cancelled ones "
            "included. Negative for a loop with a growing mode."
        ),
        absent_when="the loop has no poles",
        source="specgate's own definition: minus the largest real part of the poles",
        method=_ROOTS,
        read=_well_posed(_decay_rate),
        at_limit=_at_limit(compare_decay_rate),
        arguments=_RANGE,
        signed=True,
        always=True,
    ),
)
