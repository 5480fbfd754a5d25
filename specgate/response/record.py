"""How a number of a response was proved, in plain values: for the record, computed only where it is asked for.

Nothing stands here that two processors could find differently: counts of what is proved, radii rounded up to a power of
ten, times from which on something is proved rounded up to three digits.
"""

from __future__ import annotations

from collections.abc import Mapping
from math import ceil

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.course import Course
from specgate.response.deviation import LOWEST
from specgate.response.modes import power_of_two
from specgate.terms.enclosed import ends, rounded, to_float
from specgate.terms.precision import working_precision

_DIGITS = 3


def modal_record(course: Course, method: str, *, brackets: int, since: fmpq | None = None) -> Mapping[str, object]:
    """Say what a search in a sum of modes rests on.

    brackets: intervals with one proved change of sign each that hold what is searched. since: normalised time from
    which on a bound, and no search, excludes it.
    """
    deviation = course.deviation
    expansion = deviation.at(LOWEST)
    with working_precision(expansion.bits):
        scale = power_of_two(deviation.time_exponent)
        radius = max((_radius(mode.pole.real * scale, mode.pole.imag * scale) for mode in expansion.modes), default=0.0)
    poles = sum(len(mode.coefficients) * (2 if mode.oscillates else 1) for mode in expansion.modes)
    found: dict[str, object] = {
        "method": method,
        "poles": poles,
        "pole_radius": radius,
        "bits_of_modes": expansion.bits,
        "brackets": brackets,
    }
    if since is not None:
        found["searched_until"] = rounded_up(deviation.to_time(arb(since), LOWEST))
    return found


def _radius(*balls: arb) -> float:
    """Return a power of ten that the radii of balls do not exceed, 0 for exact ones."""
    largest = max((ball.rad() for ball in balls), key=float)
    if largest == 0:
        return 0.0
    return float(f"1e{ceil((largest.log() / arb(10).log()).upper().fmpq())}")


def rounded_up(time: arb) -> float:
    """Return a time rounded up to three digits."""
    return to_float(rounded(ends(time)[1], "up", _DIGITS))


def together(method: str, **parts: Answer) -> Mapping[str, object]:
    """Say that a number is made of others, each with its own record."""
    return {"method": method, "parts": {name: part.how() for name, part in parts.items() if part.how is not None}}
