"""Numbers as they are printed: only the digits that are proved and matter.

A result shows four significant digits; more where it comes close to its limit, so that two digits of what is left
always show; fewer where the proved interval decides fewer. Exact values that are short stand as they are.
"""

from __future__ import annotations

from collections.abc import Sequence
from decimal import ROUND_FLOOR, ROUND_HALF_EVEN, ROUND_UP, Decimal
from fractions import Fraction

SIGNIFICANT = 4
PRINTED = 12
"""Significant digits of the results format; no more are ever shown."""
SHORT = 6
"""An exact decimal of at most this many digits is printed whole."""
RATIO = 9
"""An exact ratio of at most this many characters is printed as a ratio."""
MINUS, FIGURE_SPACE, POINT_SPACE = "\u2212", "\u2007", "\u2008"
INFINITE = "\u221e"
_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


def decimal(value: float) -> Decimal:
    """Return the decimal that the shortest text of `value` names: what stands in the results file."""
    return Decimal(repr(value)) if isinstance(value, float) else Decimal(value)


def _short(value: Decimal) -> bool:
    return len(value.normalize().as_tuple().digits) <= SHORT and -4 <= value.adjusted() < SHORT


def last_place(
    value: Decimal,
    bounds: tuple[float | None, float | None] = (None, None),
    limits: Sequence[float] = (),
    exact: bool = False,
) -> int:
    """Return the power of ten of the last digit worth printing of `value`."""
    if exact and _short(value):
        return min(0, int(value.normalize().as_tuple().exponent))
    if value == 0:
        return 0
    place = value.adjusted() - (SIGNIFICANT - 1)
    left = [gap.adjusted() for gap in (abs(value - decimal(limit)) for limit in limits) if gap]
    met = [int(value.normalize().as_tuple().exponent) for limit in limits if value == decimal(limit)]
    place = min([place, *(gap - 1 for gap in left), *met])
    lower, upper = bounds
    if lower is not None and upper is not None and upper != lower:
        proved = (decimal(upper) - decimal(lower)).adjusted() + 1
        place = max(place, min([proved, *left]))
    if value.adjusted() < SHORT:
        place = min(place, 0)
    return max(place, value.adjusted() - (PRINTED - 1))


def written(value: Decimal, place: int, smallest: int = -4) -> str:
    """Return `value` rounded to the digit of weight 10**place; with a power of ten above 10**6, below 10**smallest."""
    if value == 0:
        return "0"
    rounded = value.quantize(Decimal(1).scaleb(place), rounding=ROUND_HALF_EVEN) if place <= value.adjusted() else value
    size = rounded.adjusted()
    if rounded and (size < smallest or size > 6):
        power = f"×10{str(size).translate(_RAISED)}"
        digits = max(0, size - place)
        return f"{rounded.scaleb(-size):.{digits}f}{power}".replace("-", MINUS)
    return f"{rounded:f}".replace("-", MINUS)


def number(value: float, significant: int = SIGNIFICANT) -> str:
    """Return a plain value: whole where it is short, else rounded to `significant` digits."""
    exact = decimal(value)
    if _short(exact):
        return written(exact, last_place(exact, exact=True))
    place = exact.adjusted() - (significant - 1)
    return written(exact, min(place, 0) if exact.adjusted() < SHORT else place)


def rounded_down(value: float, significant: int = SIGNIFICANT) -> str:
    """Return a positive value with so many digits, never more than it is."""
    exact = decimal(value)
    if not exact:
        return "0"
    place = min(exact.adjusted() - (significant - 1), 0)
    return number(float(exact.quantize(Decimal(1).scaleb(place), rounding=ROUND_FLOOR)), significant)


def fraction(text: str) -> tuple[str, bool]:
    """Return an exact rational of the results format as a decimal, and whether it had to be rounded."""
    value = Fraction(text)
    quotient = Decimal(value.numerator) / Decimal(value.denominator)
    if _short(quotient) and Fraction(quotient) == value:
        return written(quotient, last_place(quotient, exact=True)), False
    return written(quotient, quotient.adjusted() - (SIGNIFICANT + 1)), True


def half_width(value: float, lower: float, upper: float) -> str:
    """Return the distance within which the true value is proved to lie, rounded up to one digit."""
    middle = decimal(value)
    wide = max(decimal(upper) - middle, middle - decimal(lower))
    if wide <= 0:
        return "0"
    place = wide.adjusted()
    up = wide.quantize(Decimal(1).scaleb(place), rounding=ROUND_UP)
    return written(up, up.adjusted())


def percent(ratio: float) -> str:
    """Return a ratio as per cent: whole numbers from 10 %, two significant digits below."""
    value = decimal(ratio) * 100
    if value == 0:
        return "0 %"
    place = 0 if abs(value) >= 10 else value.adjusted() - 1
    return written(value, place) + " %"


def signed(text: str) -> str:
    """Return a printed number with its sign always shown."""
    return text if text.startswith((MINUS, "0", "≈", INFINITE)) and not text.startswith("0.") else "+" + text


def aligned(texts: Sequence[str]) -> tuple[str, ...]:
    """Pad printed numbers on the right with digit-wide spaces, so that set flush right they meet at the decimal sign.

    Texts with a power of ten, and words, are left alone.
    """
    plain = [bool(text) and all(c.isdigit() or c in f".{MINUS}+" for c in text) for text in texts]
    places = [len(text.partition(".")[2]) for text in texts]
    most = max((p for p, fits in zip(places, plain, strict=True) if fits), default=0)
    return tuple(
        text + _padding(text, most - have, most) if fits else text
        for text, have, fits in zip(texts, places, plain, strict=True)
    )


def _padding(text: str, missing: int, most: int) -> str:
    point = POINT_SPACE if most and "." not in text else ""
    return point + FIGURE_SPACE * missing
