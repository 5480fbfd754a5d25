"""Extremes of a response that does not settle: what grows without bound, what swings for ever, what is still finite.

The expansion is ordered by growth: real part of the pole, then power of t. Poles on the axis have a real part of
exactly zero, so that what neither grows nor decays is known exactly.

Several lasting oscillations come together as near as one likes to the sum of their amplitudes, again and again, if no
sum of their frequencies with whole factors is zero (Kronecker 1884). Square roots of rationals are such frequencies if
no quotient of two of the rationals is a square (Besicovitch 1940). If all quotients are, there is a common period
(`periodic`).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial

import numpy as np
from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.asymptote import Lasting, lasting_sign, leading_mode
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.extremes import Extreme
from specgate.response.falling import smallest
from specgate.response.modes import GUARD, Expansion, Mode, dyadic, power_of_two
from specgate.response.periodic import (
    common_period,
    highest_of_a_period,
    independent,
    periodic_part,
    swinging_factors,
)
from specgate.response.record import modal_account
from specgate.response.segments import Floats, at_least, at_most, exact
from specgate.response.supremum import APPROACHED, Floor, above, exact_floor
from specgate.response.tables import FloatModes
from specgate.response.tail import float_tail
from specgate.terms.precision import working_precision

_NOT_TOLD = "whether the growth of the response is one-sided is not told"
_SWING = "what the lasting oscillations come back to, about their middle; nothing else is higher"
_SEVERAL = (
    "the greatest value of several lasting oscillations is searched only where their frequencies are square roots"
)
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


Height = Callable[[int], arb]
"""What sign * g comes back to for ever, as balls by bits."""


def _swinging(course: Course, sign: int, expansion: Expansion) -> Extreme:
    """Answer for a response that ends in lasting oscillations: one, or several without or with a common period."""
    if len(expansion.modes) == 1:
        return _pure_swing(course, sign)
    lasting = [k for k, mode in enumerate(expansion.modes) if mode.pole.real.is_zero()]
    transient = expansion.only([k for k in range(len(expansion.modes)) if k not in lasting])
    height: Height | None = partial(_amplitude, course, lasting)
    if len(lasting) > 1:
        squares = [factor[0] for factor in swinging_factors(course.deviation.denominator)]
        period = common_period(squares) if len(squares) == len(lasting) else None
        if period is not None and not transient.modes:
            return highest_of_a_period(course, sign, period)
        if period is not None:
            height = _periodic_height(course, sign, period)
        elif len(squares) != len(lasting) or not independent(squares):
            height = None
    if height is None:
        return Extreme.undecided(_SEVERAL)
    time = Answer.nothing(APPROACHED) if len(lasting) == 1 else Answer.undecided(_COMING_BACK)
    swings = Extreme(_swing_top(course, sign, height), time)
    return _with_transient(course, sign, transient, height, swings) if transient.modes else swings


def _periodic_height(course: Course, sign: int, period: fmpq) -> Height | None:
    """Return what several oscillations with a common period come back to; None where that is not told."""
    pure = periodic_part(course)
    scaled = period * dyadic(pure.deviation.time_exponent - course.deviation.time_exponent)
    found = highest_of_a_period(pure, sign, scaled).value
    if found.absent is not None:
        return None

    def height(bits: int) -> arb:
        value = found.enclose(bits)
        with working_precision(bits + GUARD):
            return sign * value * power_of_two(-course.deviation.value_exponent)

    return height


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
    return Extreme(_swing_top(course, sign, partial(_amplitude, course, [0])), Answer.of_ball(time).accounted(how))


def _swing_top(course: Course, sign: int, height: Height) -> Answer:
    top = Answer.of_ball(lambda bits: course.deviation.response(sign * height(bits)))
    return top.accounted(partial(modal_account, course, _SWING))


def _amplitude(course: Course, lasting: Sequence[int], bits: int) -> arb:
    """Return the sum of the amplitudes of the lasting oscillations."""
    expansion = course.deviation.at(bits)
    with working_precision(expansion.bits):
        return sum((abs(expansion.modes[index].coefficients[0]) for index in lasting), arb(0))


def _with_transient(course: Course, sign: int, transient: Expansion, height: Height, swings: Extreme) -> Extreme:
    """Return the highest summit above what lasting swings come back to for ever, or else that.

    Beyond a summit that is higher by d nothing is, once the envelope of the transient is below d; and nothing is above
    what they come back to while the transient has the other sign for good.
    """
    deviation = course.deviation
    table = FloatModes.of(transient, fmpq(0))
    reached = height(LOWEST)
    top = at_most(reached)

    def last(best: float, _: Callable[[int], arb]) -> fmpq | None:
        excess = (best - top) * (1.0 - 1e-9) - 1e-15 * top
        if excess > 0.0:
            since = float_tail(table, excess)
            return None if since is None else exact(since)
        for_good = lasting_sign(transient, deviation.denominator)
        return exact(for_good.since) if for_good is not None and for_good.sign != sign else None

    jump = sign * deviation.initial
    with working_precision(transient.bits):
        higher_jump = reached < arb(jump)
    if higher_jump:
        return above(course, sign, exact_floor(course, sign, jump, taken=True), last)
    return above(course, sign, Floor(height, at_least(reached), swings), last)
