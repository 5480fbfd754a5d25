"""From exact and enclosed values to the plain values of a Review."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from typing import Any, cast

from flint import fmpq, fmpq_poly

from specgate.compliance.readings import Reading
from specgate.response.accounts import Account
from specgate.response.answers import Answer, Fragile
from specgate.review.types import Amount, Beside, DelayedTerm, Location, Pole, ProofPart, ProofRecord, Result
from specgate.systems.quasi import Quasi
from specgate.systems.roots import Root
from specgate.terms.decimals import power_of_ten
from specgate.terms.enclosed import (
    DIGITS,
    Enclosed,
    ends,
    in_unit,
    magnitude,
    precision_of,
    printed,
    printed_exact,
    to_float,
)
from specgate.terms.places import Place
from specgate.terms.unit import ONE, Unit
from specgate.terms.units import UnitTable
from specgate.terms.verdicts import Proof

_EXACT = "an exact number in rational arithmetic; the bounds are those of pi or of the decibels that it is printed with"

SECOND = UnitTable.standard().parse("s")
RADIAN_PER_SECOND = UnitTable.standard().parse("rad/s")


def location(place: Place, message: str | None = None) -> Location:
    """Print a place."""
    return Location(place.path, place.line, place.column, message)


def fraction(value: fmpq) -> str:
    """Print a rational as a fraction, or as a whole number."""
    return str(value.p) if value.q == 1 else f"{value.p}/{value.q}"


def short(value: fmpq) -> str:
    """Print a rational in few digits."""
    return f"{printed_exact(value).value:.6g}"


def coefficients(polynomial: fmpq_poly) -> tuple[str, ...]:
    """Print a polynomial: exact coefficients, highest power first."""
    return tuple(fraction(value) for value in reversed(polynomial.coeffs())) or ("0",)


def terms(quasi: Quasi) -> tuple[DelayedTerm, ...]:
    """Print a quasi-polynomial: exact terms by rising delay."""
    return tuple(DelayedTerm(fraction(delay), coefficients(polynomial)) for delay, polynomial in quasi.terms)


def poles(roots: Iterable[Root]) -> tuple[Pole, ...]:
    """Print certified roots; the radius holds the rounding of what is printed."""
    return tuple(_pole(root) for root in roots)


def _pole(root: Root) -> Pole:
    size = max(abs(end) for ball in (root.value.real, root.value.imag) for end in ends(ball))
    radius = 0.0 if size == 0 else to_float(power_of_ten(magnitude(size) - DIGITS + 1))
    real = 0.0 if root.value.real.contains(0) else printed(lambda _: root.value.real).value
    imaginary = 0.0 if root.value.imag.contains(0) else printed(lambda _: root.value.imag).value
    return Pole(real, imaginary, root.multiplicity, radius)


def amount(reading: Reading, unit: Unit, as_written: str | None = None) -> Amount:
    """Print a number in coherent SI as an amount in `unit`."""
    form = printed_form(reading.in_unit(unit), None)
    return Amount(form.value, unit.symbol, form.exact, as_written)


def stated(value: fmpq, unit: Unit, as_written: str) -> Amount:
    """Print a literal of the file, in coherent SI, as an amount in the unit it is written in."""
    if unit.kind == "decibel":
        return amount(Reading.once(Answer.of_exact(value)), unit, as_written)
    form = printed_exact(value / unit.si_factor)
    return Amount(form.value, unit.symbol, form.exact, as_written)


def amount_of(answer: Answer, unit: Unit, scale: fmpq | None = None) -> Amount | None:
    """Print an answer in coherent SI as an amount in `unit`; None where it has no value."""
    if answer.absent is not None or answer.truth is not None:
        return None
    try:
        form = printed_form(Reading.once(answer).in_unit(unit), scale)
    except OverflowError:
        return None
    return Amount(form.value, unit.symbol, form.exact)


def plain_number(answer: Answer, scale: fmpq | None = None) -> float | None:
    """Print an answer that has a value, in the unit in which it is; None where it is too large for that."""
    try:
        return printed_form(answer, scale).value
    except OverflowError:
        return None


def result(
    reading: Reading,
    unit: Unit | None,
    scale: fmpq | None,
    beside: Reading | None = None,
    signal: Unit = ONE,
    *,
    method: str | None = None,
) -> Result:
    """Print what was read. unit None: a whole number, yes or no. scale: what it is small against, in that unit.

    signal: the unit of the signal that is looked at, for what is printed beside the result. method: of the measure,
    where a bounded result, or a yes or no that was searched for, is to say how it was obtained.
    """
    found = _result(reading, unit, scale, beside)
    if method is not None:
        found = replace(found, proof_record=_record(reading, found, unit, scale, method))
    return found if reading.settled.at is None else replace(found, at=_beside(reading, signal))


def _record(reading: Reading, found: Result, unit: Unit | None, scale: fmpq | None, method: str) -> ProofRecord | None:
    """Say how a bounded result was obtained; None of one that is exact."""
    answer = reading.settled
    if found.value is None or (found.proof != Proof.ENCLOSED.value and (answer.truth is None or answer.how is None)):
        return None
    known = answer.exact is not None
    account = answer.how() if answer.how is not None else Account(_EXACT if known else method)
    bits = None if unit is None else precision_of(reading.in_unit(unit).enclose, scale)
    return ProofRecord(**_told(account), bits=bits, parts=_parts(account))


def _parts(account: Account) -> dict[str, ProofPart] | None:
    return {name: ProofPart(**_told(part)) for name, part in account.parts.items()} or None


def _told(account: Account) -> dict[str, Any]:
    footing = account.footing
    return {
        "method": account.method,
        "ground": None if footing is None else footing.ground,
        "poles": None if footing is None else footing.poles,
        "pole_radius": None if footing is None else footing.pole_radius,
        "bits_of_modes": None if footing is None else footing.bits_of_modes,
        "brackets": account.brackets,
        "searched_until": account.searched_until,
        "counts": dict(account.counts) or None,
    }


def _beside(reading: Reading, signal: Unit) -> Beside:
    units = {"frequency": RADIAN_PER_SECOND, "time": SECOND, "value": signal, "limit": signal}
    first, second = reading.answer.at or {}, reading.again.at or {}
    found = {
        name: one if isinstance(one, str) else place_of(_paired(one, second.get(name)), units[name])
        for name, one in first.items()
    }
    return Beside(**cast("dict[str, Any]", found))


def _paired(first: Answer, second: Answer | str | None) -> Reading:
    """Return a reading of something that was found twice; where it was only found once it is no more exact for that."""
    return Reading(first, second if isinstance(second, Answer) else first)


def place_of(reading: Reading, unit: Unit) -> Amount:
    """Print where something is; one without limit as such."""
    answer = reading.settled
    if answer.absent is not None:
        return Amount(None, unit.symbol, infinite=True if answer.absent.infinite else None)
    try:
        return amount(reading, unit)
    except OverflowError:
        return Amount(None, unit.symbol)


def _result(reading: Reading, unit: Unit | None, scale: fmpq | None, beside: Reading | None) -> Result:
    answer = reading.settled
    if answer.absent is not None:
        infinite = True if answer.absent.infinite else None
        return Result(
            None,
            proof=answer.proof.value if infinite else None,
            reason=answer.absent.reason,
            infinite=infinite,
            fragile=None if unit is None else _fragile(answer.fragile, unit),
        )
    if answer.truth is not None:
        return Result(answer.truth, proof=answer.proof.value)
    if unit is None:
        return _counted(answer)
    if unit.kind == "decibel" and answer.exact == 0:
        return Result(None, proof=answer.proof.value, reason="the gain is zero, which no number of decibels is")
    try:
        form = printed_form(reading.in_unit(unit), scale)
    except OverflowError as problem:
        return Result(None, reason=str(problem))
    signed = (
        None if beside is None or beside.settled.absent is not None else printed_form(beside.in_unit(unit), scale).value
    )
    return Result(
        form.value,
        form.lower,
        form.upper,
        form.exact,
        unit.symbol,
        form.proof.value,
        fragile=_fragile(answer.fragile, unit),
        signed=signed,
    )


def _counted(answer: Answer) -> Result:
    if answer.exact is None or answer.exact.q != 1:
        raise ValueError("a whole number is wanted")
    return Result(int(answer.exact.p), proof=Proof.EXACT.value)


def printed_form(answer: Answer, scale: fmpq | None = None) -> Enclosed:
    """Print an answer that has a value, in the unit in which it is. Raises OverflowError for one too large."""
    return printed_exact(answer.exact) if answer.exact is not None else printed(answer.enclose, scale)


def _fragile(fragile: Fragile | None, unit: Unit) -> str | None:
    if fragile is None:
        return None
    if fragile.other is None:
        return fragile.reason
    other = printed(in_unit(fragile.other, unit))
    return f"{fragile.reason}; the other candidate is {other.value:.6g} {unit.symbol}"


def as_plain(value: Any) -> Any:
    """Turn kept content into what JSON can hold: tables, lists, texts, whole numbers, yes/no and null."""
    if isinstance(value, Mapping):
        return {str(key): as_plain(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [as_plain(part) for part in value]
    return value if value is None or isinstance(value, bool | int | float | str) else str(value)
