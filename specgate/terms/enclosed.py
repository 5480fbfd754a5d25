"""The printed form of a number: 12 significant digits that are the same on any machine, and proved bounds.

A number reaches the output only through a ball that is refined until its rounding is unique. The last bits of
floats differ between processors; the decimal that the true value rounds to does not.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from functools import lru_cache
from typing import Literal

from flint import arb, fmpq, fmpz

from specgate.terms.decimals import power_of_ten
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.unit import PI, Unit
from specgate.terms.verdicts import Proof

DIGITS = 12
"""Significant digits of a printed number."""

SHORT = 6
"""Significant digits of what is only drawn or shown beside a number that matters."""

_FINE = fmpq(1, 10**14)
"""Relative radius below which the bounds of a ball are printed."""

_LEAST = fmpq(10 ** (DIGITS - 1))
"""The least number that has DIGITS digits before the point."""

_NOTHING = fmpq(1, 10**12)
"""Part of the scale (the change of a response) below which a number that is not proved to be zero prints as 0."""

_NOISE = 1e-12
"""The same for numbers of few digits."""

_GREATEST = fmpq(int(sys.float_info.max))

_TINY = fmpq(1, 2**4000)
"""Far below the smallest float: rationals need no more digits than this."""

_PRECISIONS = (64, 128, 192, 256)
"""Bits tried in turn. What 256 bits cannot tell from a decimal is treated as that decimal."""

_PI_RADIUS = fmpq(1, 10**59)
"""Distance beyond which pi does not lie from the decimal that stands for it."""

Refine = Callable[[int], arb]
"""From a working precision in bits to a ball that contains the value."""


@record
class Enclosed:
    """A number as printed: nearest 12-digit decimal, outward 12-digit bounds (None for an exact value).

    exact: the value as a fraction, for exact values only.
    """

    value: float
    lower: float | None
    upper: float | None
    exact: str | None
    proof: Proof


def ends(ball: arb) -> tuple[fmpq, fmpq]:
    """Return the lower and upper end of a ball; a middle or radius below _TINY counts as _TINY of radius.

    Raises OverflowError for a ball beyond the numbers that can be printed.
    """
    if not ball.is_finite() or ball.abs_upper() > arb(1 / _TINY):
        raise OverflowError("this number is too large to be printed")
    middle, radius = ball.mid(), ball.rad()
    doubt = fmpq(0) if radius == 0 else _TINY if radius < arb(_TINY) else _rational(radius)
    if middle == 0:
        return -doubt, doubt
    if abs(middle) < arb(_TINY):
        return -doubt - _TINY, doubt + _TINY
    return _rational(middle) - doubt, _rational(middle) + doubt


def in_unit(refine: Refine, unit: Unit) -> Refine:
    """Turn balls in coherent SI into balls in `unit`; a ratio into decibels, 20 log10 of its magnitude."""

    def convert(bits: int) -> arb:
        ball = refine(bits)
        with working_precision(bits + 16):
            if unit.kind == "decibel":
                return 20 * abs(ball).log() / arb.const_log10()
            if unit.pi_power == 0:
                return ball / unit.factor
            pi = arb(PI) + arb(0, arb(_PI_RADIUS))
            return ball / (unit.factor * pi**unit.pi_power)

    return convert


def printed_exact(value: fmpq) -> Enclosed:
    """Print a rational that is known exactly."""
    text = f"{value.p}/{value.q}" if value.q != 1 else str(value.p)
    return Enclosed(to_float(rounded(value)), None, None, text, Proof.EXACT)


def printed(refine: Refine, scale: fmpq | None = None) -> Enclosed:
    """Print an enclosed number, in whatever unit `refine` answers.

    scale: what a number is small against (the change of a response, same unit); without it only the relative
    width counts. Where the ball cannot be refined further, the bounds are those of the widest digits known.
    Raises OverflowError for a number beyond the range of floats.
    """
    return _printed(refine, scale)[0]


def precision_of(refine: Refine, scale: fmpq | None = None) -> int:
    """Return the bits at which a number is printed. Raises OverflowError for one beyond the range of floats."""
    return _printed(refine, scale)[1]


def _printed(refine: Refine, scale: fmpq | None) -> tuple[Enclosed, int]:
    nothing = None if scale is None else abs(scale) * _NOTHING
    low = high = fmpq(0)
    unique, bits = None, _PRECISIONS[0]
    for bits in _PRECISIONS:
        low, high = ends(refine(bits))
        if nothing is not None and -nothing <= low and high <= nothing:
            return _nearly_zero(low, high, nothing), bits
        unique = _unique(low, high)
        if unique is not None:
            break
    if min(abs(low), abs(high)) > _GREATEST:
        raise OverflowError("this number is too large to be printed")
    return unique or _settled(low, high), bits


def printed_short(ball: arb, scale: float | None = None) -> float:
    """Return the middle of a narrow ball to 6 significant digits, for drawing and for what is shown beside a claim.

    scale: what a number is small against; next to it, noise prints as 0.
    """
    middle = float(ball.mid())
    if scale is not None and abs(middle) + float(ball.rad()) <= scale * _NOISE:
        return 0.0
    return float(f"{middle:.{SHORT}g}")


def _nearly_zero(low: fmpq, high: fmpq, nothing: fmpq) -> Enclosed:
    lower = fmpq(0) if low >= 0 else -nothing
    upper = fmpq(0) if high <= 0 else nothing
    return Enclosed(0.0, to_float(rounded(lower, "down")), to_float(rounded(upper, "up")), None, Proof.ENCLOSED)


def _unique(low: fmpq, high: fmpq) -> Enclosed | None:
    """Round a fine ball all of which rounds to one decimal to nearest, and to one downwards; any other to None."""
    if not _fine(low, high):
        return None
    unit = _power_of_ten(magnitude(low) - DIGITS + 1)
    first, last = low / unit, high / unit
    below, value = first.floor(), _nearest(first)
    # the end nearer to zero may have one digit less
    if last.floor() != below or _nearest(last) != value or abs(last) < _LEAST:
        return None
    above = below if last == below else below + 1
    return Enclosed(to_float(value * unit), to_float(below * unit), to_float(above * unit), None, Proof.ENCLOSED)


def _settled(low: fmpq, high: fmpq) -> Enclosed:
    """Round what is left: a fine ball about a decimal (or a tie) is taken as that decimal, a wide one by its digits."""
    digits = DIGITS if _fine(low, high) else _known_digits(low, high)
    lower, upper = rounded(low, "down", digits), rounded(high, "up", digits)
    value = rounded(low, "nearest", digits)
    if value != rounded(high, "nearest", digits):
        # The ball holds a tie: take the tie itself, not the side on which its middle happens to fall.
        value = rounded(rounded((low + high) / 2, "nearest", digits + 2), "nearest", digits)
    return Enclosed(to_float(value), to_float(lower), to_float(upper), None, Proof.ENCLOSED)


def _fine(low: fmpq, high: fmpq) -> bool:
    return high - low <= 2 * _FINE * min(abs(low), abs(high)) and (low > 0 or high < 0)


def _known_digits(low: fmpq, high: fmpq) -> int:
    """Return how many digits of a wide ball mean anything: at most two beyond its width, so that noise stays out."""
    width, size = high - low, max(abs(low), abs(high))
    if width == 0 or size == 0:
        return DIGITS
    return max(2, min(DIGITS, magnitude(size) - magnitude(width) + 3))


def rounded(value: fmpq, direction: Literal["nearest", "down", "up"] = "nearest", digits: int = DIGITS) -> fmpq:
    """Round to a decimal of so many significant digits; `nearest` takes ties to even, down and up are signed."""
    if value == 0:
        return value
    unit = _power_of_ten(magnitude(value) - digits + 1)
    scaled = value / unit
    if direction == "down":
        return fmpq(scaled.floor()) * unit
    if direction == "up":
        return fmpq(scaled.ceil()) * unit
    return fmpq(_nearest(scaled)) * unit


def _nearest(value: fmpq) -> fmpz:
    below = value.floor()
    double = 2 * (value - below)
    if double == 1:
        return below if below % 2 == 0 else below + 1
    return below if double < 1 else below + 1


def to_float(value: fmpq) -> float:
    """Return the nearest float; beyond its range the largest one of that sign."""
    try:
        return int(value.p) / int(value.q)
    except OverflowError:
        return sys.float_info.max if value > 0 else -sys.float_info.max


def magnitude(value: fmpq) -> int:
    """Return e with 10^e <= |value| < 10^(e+1)."""
    size = abs(value)
    guess = int((int(size.p).bit_length() - int(size.q).bit_length()) * 0.30103)
    while _power_of_ten(guess) > size:
        guess -= 1
    while _power_of_ten(guess + 1) <= size:
        guess += 1
    return guess


_power_of_ten = lru_cache(1024)(power_of_ten)


def _rational(exact: arb) -> fmpq:
    mantissa, exponent = exact.man_exp()
    shift = int(exponent)
    return fmpq(mantissa * fmpz(2) ** shift) if shift >= 0 else fmpq(mantissa, fmpz(2) ** -shift)
