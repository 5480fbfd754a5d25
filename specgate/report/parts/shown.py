"""A result, an amount or a polynomial as it is printed."""

from __future__ import annotations

from specgate.report import digits
from specgate.report.words import UNITLESS, edges, spaced, with_unit, yes_no
from specgate.review.types import DelayedTerm, LimitReview, Pole, ReserveReview, Result
from specgate.terms.records import record

_RAISED = str.maketrans("0123456789", "⁰¹²³⁴⁵⁶⁷⁸⁹")


@record
class Shown:
    """A result as printed: the number (or a word), its unit, how firmly it is known, and what has to be said of it."""

    value: str
    unit: str
    bound: str
    note: str

    @property
    def whole(self) -> str:
        """The number with its unit."""
        return with_unit(self.value, self.unit)


def result(found: Result, limit: LimitReview | None = None) -> Shown:
    """Return a result as printed, with more digits where the limit is close."""
    unit = "" if found.unit in UNITLESS else str(found.unit)
    if found.infinite:
        return Shown("unlimited", "", _bound(found), found.reason or "")
    if found.value is None:
        return Shown("none", "", "", found.reason or "does not exist")
    if isinstance(found.value, bool):
        return Shown(yes_no(found.value), "", _bound(found), found.reason or "")
    value = digits.decimal(found.value)
    place = digits.last_place(value, (found.lower, found.upper), edges(limit) if limit else (), found.proof == "exact")
    note = "; ".join(word for word in (found.fragile, found.reason) if word)
    if found.signed is not None and found.signed != found.value:
        note = "; ".join(filter(None, (f"signed {digits.number(found.signed)}", note)))
    return Shown(digits.written(value, place), unit, _bound(found), note)


def _bound(found: Result) -> str:
    """Return how firmly a result is known: exact, the half-width of its proved interval, or that it is estimated."""
    if found.proof == "enclosed" and isinstance(found.value, float | int) and None not in (found.lower, found.upper):
        width = digits.half_width(found.value, found.lower or 0.0, found.upper or 0.0)
        return f"± {width}" if width != "0" else "proved"
    return spaced(found.proof or "")


def reserve(left: ReserveReview | None, found: Result, limit: LimitReview) -> str:
    """Return a reserve with its sign, to the last digit printed of its result."""
    if left is None:
        return ""
    if left.infinite:
        return "unlimited"
    if left.value is None or isinstance(found.value, bool | None):
        return ""
    value = digits.decimal(found.value)
    place = digits.last_place(value, (found.lower, found.upper), edges(limit), found.proof == "exact")
    own = digits.decimal(left.value)
    if not own:
        return "0"
    if place < own.adjusted() - (digits.PRINTED - 1):
        # A result of 1e-30 under a limit of 9: its last digit is beyond all that the reserve has.
        place = own.adjusted() - (digits.SIGNIFICANT - 1)
    return digits.signed(digits.written(own, min(place, own.adjusted()), smallest=-8))


def polynomial(coefficients: tuple[str, ...], variable: str = "s") -> str:
    """Return exact coefficients, highest power first, as a polynomial: `s³ + 10.4 s² + 65 s + 24.4`.

    It begins with `≈` where a coefficient is too long to be printed whole.
    """
    terms: list[str] = []
    sizes = [digits.fraction(text.removeprefix("-")) for text in coefficients]
    whole = all(not cut or len(text) <= digits.RATIO for text, (_, cut) in zip(coefficients, sizes, strict=True))
    powers = range(len(coefficients) - 1, -1, -1)
    for power, text, (size, cut) in zip(powers, coefficients, sizes, strict=True):
        if text == "0":
            continue
        size = text.removeprefix("-") if cut and whole else size
        symbol = variable if power == 1 else variable + str(power).translate(_RAISED) if power else ""
        body = symbol if size == "1" and symbol else f"{size} {symbol}".strip()
        sign = digits.MINUS if text.startswith("-") else "+"
        terms.append(f"{sign} {body}" if terms else body if sign == "+" else digits.MINUS + body)
    return ("" if whole else "≈ ") + (" ".join(terms) or "0")


def delayed(terms: tuple[DelayedTerm, ...]) -> str:
    """Return a sum of polynomials with dead time: `s² + 0.5 s + (0.45 s + 0.25) e^(−1.2 s)`."""
    parts = [_delayed(term) for term in terms]
    return " + ".join(parts) or "0"


def _delayed(term: DelayedTerm) -> str:
    body = polynomial(term.coefficients)
    if term.delay == "0":
        return body
    power = dead_time(term.delay)
    return power if body == "1" else f"({body}) {power}"


def dead_time(seconds: str) -> str:
    """Return the factor of a transfer function that an exact dead time is: `e^(−1.2 s)`."""
    size = digits.fraction(seconds)[0]
    return f"e^({digits.MINUS}{'' if size == '1' else size + ' '}s)"


def transfer(coefficients: tuple[str, ...], terms: tuple[DelayedTerm, ...] | None, variable: str = "s") -> str:
    """Return a numerator or denominator, with dead time or without."""
    return polynomial(coefficients, variable) if terms is None else delayed(terms)


def pole(of: Pole) -> str:
    """Return a pole's value, 1/s."""
    real = digits.number(of.real)
    if not of.imaginary:
        return real
    sign = "+" if of.imaginary > 0 else digits.MINUS
    return f"{real} {sign} {digits.number(abs(of.imaginary))}j"
