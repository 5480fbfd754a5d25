"""Extremes of a response that does not settle: what grows without bound, what swings for ever, what is still finite.

The expansion is ordered by growth: real part of the pole, then power of t. Poles on the axis have a real part of
exactly zero, so that what neither grows nor decays is known exactly.

Several lasting oscillations come together as near as one likes to the sum of their amplitudes, again and again, if no
sum of their frequencies with whole factors is zero (Kronecker 1884). Square roots of rationals are such frequencies if
no quotient of two of the rationals is a square (Besicovitch 1940).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial
from itertools import combinations

import numpy as np
from flint import arb, fmpq, fmpq_poly

from specgate.response.answers import Answer
from specgate.response.asymptote import Lasting, lasting_sign, leading_mode
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.extremes import Extreme
from specgate.response.falling import smallest
from specgate.response.modes import Expansion, Mode
from specgate.response.record import modal_account
from specgate.response.segments import Floats, at_least, at_most, exact
from specgate.response.supremum import APPROACHED, Floor, above, exact_floor
from specgate.response.tables import FloatModes
from specgate.response.tail import float_tail
from specgate.systems.polynomials import primitive
from specgate.terms.precision import working_precision

_NOT_TOLD = "whether the growth of the response is one-sided is not told"
_SWING = "the amplitudes of the lasting oscillations about their middle; nothing else is higher"
_SEVERAL = "the greatest value of several lasting oscillations that come back together is not searched"
_COMING_BACK = "several oscillations come as near to it as one likes, and whether they reach it is not told"


def unsettled_extreme(course: Course, sign: int) -> Extreme:
    """Return the supremum over t > 0 of sign * y, as a value of y, where y does not settle."""
    expansion = course.deviation.at(LOWEST)
    if any(mode.pole.real > 0 or _grows_on_axis(mode) for mode in expansion.modes):
        return _growing(course, sign, expansion)
    return _swinging(course, sign, expansion)


def _grows_on_axis(mode: Mode) -> bool:
    return bool(mode.pole.real.is_zero()) and len(mode.coefficients) > 1


def _growing(course: Course, sign: int, expansion: Expansion) -> Extreme:
    """Answer for a response without bound: to one side if one real term leads, to both if oscillations do."""
    lasting = lasting_sign(expansion, course.deviation.denominator, 0.5)
    if lasting is None:
        return _without_bound() if _swings_wider(expansion) else Extreme.undecided(_NOT_TOLD)
    if lasting.sign == sign:
        return _without_bound()
    floor = exact_floor(course, sign, sign * course.deviation.initial, taken=True)
    return above(course, sign, floor, lambda best, _: _left_behind(expansion, lasting, best))


def _without_bound() -> Extreme:
    return Extreme.nothing("the response grows without bound")


def _swings_wider(expansion: Expansion) -> bool:
    """Whether the fastest growing terms are all oscillations: their sum has mean zero and takes both signs for ever."""
    with working_precision(expansion.bits):
        fastest = max(expansion.modes, key=lambda mode: (float(mode.pole.real), len(mode.coefficients)))
        return fastest.oscillates and all(
            mode.oscillates
            or mode.pole.real < fastest.pole.real
            or (_both_on_axis(mode, fastest) and len(mode.coefficients) < len(fastest.coefficients))
            for mode in expansion.modes
        )


def _both_on_axis(one: Mode, other: Mode) -> bool:
    return bool(one.pole.real.is_zero() and other.pole.real.is_zero())


def _left_behind(expansion: Expansion, lasting: Lasting, best: float) -> fmpq | None:
    """Return a time from which on sign * g is below `best`: it is negative and at least half its leading term."""
    lead = leading_mode(expansion)
    half = 0.5 * at_least(abs(lead.coefficients[-1]))
    power, rate = len(lead.coefficients) - 1, max(0.0, at_least(lead.pole.real))

    def shortfall(times: Floats) -> Floats:
        with np.errstate(over="ignore"):
            return np.asarray(-best - half * times**power * np.exp(rate * times), dtype=np.float64)

    since = smallest(shortfall, 0.0)
    return None if since is None else exact(max(since, lasting.since))


def _swinging(course: Course, sign: int, expansion: Expansion) -> Extreme:
    """Answer for a response that ends in lasting oscillations; several that come back together are left open."""
    lasting = [k for k, mode in enumerate(expansion.modes) if mode.pole.real.is_zero()]
    if len(lasting) > 1 and not _independent(course.deviation.denominator, len(lasting)):
        return Extreme.undecided(_SEVERAL)
    if len(expansion.modes) == 1:
        return _pure_swing(course, sign)
    return _swings_with_transient(course, sign, lasting)


def _independent(denominator: fmpq_poly, count: int) -> bool:
    """Whether so many lasting oscillations have squared frequencies that are rational, no quotient being a square."""
    factors = [factor for factor, _ in primitive(denominator).factor()[1]]
    squares = [fmpq(one[0], one[2]) for one in factors if one.degree() == 2 and one[1] == 0 and one[0] * one[2] > 0]
    if len(squares) != count:
        return False
    return not any(_is_square(one / other) for one, other in combinations(squares, 2))


def _is_square(value: fmpq) -> bool:
    return bool(value.p.is_square() and value.q.is_square())


def _pure_swing(course: Course, sign: int) -> Extreme:
    """Return offset + |D| and the first t with arg(D) + omega t = 0 (mod 2 pi), for y = offset + Re(D e^(j omega t)).

    A response that starts with slope zero starts at a summit or in a trough.
    """
    deviation = course.deviation
    level = sign * deviation.initial
    if course.start.power > 0 and level > 0:
        return exact_floor(course, sign, level, taken=True).extreme

    def time(bits: int) -> arb:
        expansion = deviation.at(bits)
        mode = expansion.modes[0]
        with working_precision(expansion.bits):
            angle = arb.pi() if course.start.power > 0 else -(sign * mode.coefficients[0]).arg()
            turn = angle if angle > 0 else angle + 2 * arb.pi()
            return deviation.to_time(turn / mode.pole.imag, expansion.bits)

    how = partial(modal_account, course, _SWING)
    return Extreme(_swing_top(course, [0], sign), Answer.of_ball(time).accounted(how))


def _swing_top(course: Course, lasting: Sequence[int], sign: int) -> Answer:
    top = Answer.of_ball(lambda bits: course.deviation.response(sign * _amplitude(course, lasting, bits)))
    return top.accounted(partial(modal_account, course, _SWING))


def _amplitude(course: Course, lasting: Sequence[int], bits: int) -> arb:
    """Return the sum of the amplitudes of the lasting oscillations."""
    expansion = course.deviation.at(bits)
    with working_precision(expansion.bits):
        return sum((abs(expansion.modes[index].coefficients[0]) for index in lasting), arb(0))


def _swings_with_transient(course: Course, sign: int, lasting: Sequence[int]) -> Extreme:
    """Return the highest summit above offset + amplitude, which is approached again and again, or else that value.

    Beyond a summit that is higher by d nothing is, once the envelope of the transient is below d; and nothing is above
    offset + amplitude while the transient has the other sign for good.
    """
    deviation = course.deviation
    expansion = deviation.at(LOWEST)
    transient = expansion.only([k for k in range(len(expansion.modes)) if k not in lasting])
    if not transient.modes:
        return Extreme(_swing_top(course, lasting, sign), Answer.undecided(_COMING_BACK))
    table = FloatModes.of(transient, fmpq(0))
    amplitude = _amplitude(course, lasting, LOWEST)
    top = at_most(amplitude)

    def last(best: float, _: Callable[[int], arb]) -> fmpq | None:
        excess = (best - top) * (1.0 - 1e-9) - 1e-15 * top
        if excess > 0.0:
            since = float_tail(table, excess)
            return None if since is None else exact(since)
        for_good = lasting_sign(transient, deviation.denominator)
        return exact(for_good.since) if for_good is not None and for_good.sign != sign else None

    jump = sign * deviation.initial
    with working_precision(expansion.bits):
        higher_jump = amplitude < arb(jump)
    if higher_jump:
        return above(course, sign, exact_floor(course, sign, jump, taken=True), last)
    time = Answer.nothing(APPROACHED) if len(lasting) == 1 else Answer.undecided(_COMING_BACK)
    approached = Extreme(_swing_top(course, lasting, sign), time)
    floor = Floor(lambda bits: _amplitude(course, lasting, bits), at_least(amplitude), approached)
    return above(course, sign, floor, last)
