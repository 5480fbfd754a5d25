"""What the proof of a response through dead time stands on (see `response.accounts`)."""

from __future__ import annotations

from collections.abc import Sequence

from flint import acb, arb

from specgate.delays.course import POLES_AT, Course
from specgate.response.accounts import Footing, radius_of, rounded_up
from specgate.terms.enclosed import ends, rounded, to_float
from specgate.terms.precision import working_precision

_BITS = 64
_DIGITS = 3


def footing_of(courses: Sequence[Course]) -> Footing:
    """Return what is told of the proof of responses to several inputs: all of their courses."""
    told = list(dict.fromkeys(_ground(course) for course in courses))
    poles = [pole for course in courses for pole in course.poles]
    radius = radius_at([pole for pole, _ in poles], POLES_AT) if poles else None
    count = sum(times * (1 if pole.imag.is_zero() else 2) for pole, times in poles)
    bits = max((course.bits for course in courses), default=None)
    return Footing("; ".join(told), count if poles else None, radius, bits)


def radius_at(poles: Sequence[acb], bits: int) -> float:
    """Return a power of ten that the radii of poles asked for at some bits do not exceed, the same on any processor.

    How far below that a radius is depends on where Newton's steps began: a search in floats.
    """
    with working_precision(_BITS):
        nominal = [arb(0, (abs(pole) * arb(2) ** -bits).abs_upper()) for pole in poles]
    return max(
        (radius_of(pole.real, pole.imag, least) for pole, least in zip(poles, nominal, strict=True)), default=0.0
    )


def _ground(course: Course) -> str:
    early = (
        f"the method of steps: {course.terms} terms, exact sums of residues at the roots of the undelayed denominator"
    )
    if not course.looped:
        return early
    until = rounded_up(arb(course.ends))
    if course.modal is None or not course.followed:
        return f"{early}, up to {until:g} s"
    rest = course.modal.rest
    with working_precision(_BITS):
        # A line nearer to the axis than the one that was taken: what is said of that holds for it as well.
        line = to_float(rounded(ends(arb(rest.rate))[0], "down", _DIGITS))
        size = radius_of(arb(0, rest.sizes[0].abs_upper()))
    return (
        f"{early}, up to {until:g} s; from there residues at all poles right of Re s = -{line:g} 1/s, which the change "
        f"of argument along it counts, within {size:g} e^(-{line:g} t)"
    )
