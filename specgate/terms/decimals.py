"""Decimal literals as the exact rationals that they are written as; never through a binary float."""

from __future__ import annotations

import re

from flint import fmpq, fmpz

DIGITS = 100
"""Most digits of a literal. More than any measured or designed number has, few enough to stay quick."""
EXPONENT = 400
"""Greatest power of ten: beyond it a literal such as 1e999999999 would fill the memory once made exact."""

LITERAL = re.compile(r"(?P<whole>[0-9]*)(?:\.(?P<part>[0-9]*))?(?:[eE](?P<power>[+-]?[0-9]+))?", re.ASCII)


class DecimalError(ValueError):
    """A text that is no number within the limits; the message says why."""


def exact_decimal(text: str) -> fmpq:
    """Return the value of a literal such as `-12`, `0.042`, `1.5e-3`. Raises DecimalError."""
    sign = -1 if text.startswith("-") else 1
    match = LITERAL.fullmatch(text[1:] if text[:1] in ("+", "-") else text)
    whole, part = (match["whole"] or "", match["part"] or "") if match else ("", "")
    if match is None or not whole + part:
        raise DecimalError(f"`{_short(text)}` is not a number")
    if len(whole + part) > DIGITS:
        raise DecimalError(f"`{_short(text)}` has more than {DIGITS} digits")
    power = (match["power"] or "0").lstrip("+")
    if len(power.lstrip("-0")) > len(str(EXPONENT)) or abs(int(power)) > EXPONENT:
        raise DecimalError(f"`{_short(text)}` is out of reach: powers of ten go from -{EXPONENT} to {EXPONENT}")
    return sign * int(whole + part) * power_of_ten(int(power) - len(part))


def power_of_ten(power: int) -> fmpq:
    """Return 10 to a whole power, exactly."""
    return fmpq(fmpz(10) ** power) if power >= 0 else fmpq(1, fmpz(10) ** -power)


def _short(text: str) -> str:
    return text if len(text) <= 40 else text[:37] + "…"
