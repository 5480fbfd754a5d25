"""Which of two amounts is greater, exactly, in whatever units they are printed.

Amounts in one unit are compared as the rationals they are. Amounts in two units of one dimension are brought to
coherent SI: by exact factors where both carry the same power of pi, else by enclosures of pi of rising precision. Those
always decide: a rational times a power of pi that is not zero is never rational, as pi is transcendental (Lindemann
1882), so that two such amounts differ unless both are zero. A ratio against decibels: 10^(d/20) is rational only where
d/20 is whole (10 has the primes 2 and 5 once each, so no root of a power of it that is not itself a power is rational);
there the powers are compared exactly, elsewhere enclosures decide for the same reason.
"""

from __future__ import annotations

from fractions import Fraction

from flint import arb, fmpq

from specgate.review.types import Amount
from specgate.terms.precision import working_precision
from specgate.terms.unit import Unit
from specgate.terms.units import UnitError, UnitTable

_BITS = (64, 256, 1024, 4096)


def order(left: Amount, right: Amount) -> int | None:
    """Return -1, 0 or 1 as `left` is less than, equal to or greater than `right`; None where they do not compare."""
    if left.infinite or right.infinite:
        return int(bool(left.infinite)) - int(bool(right.infinite))
    one, other = number(left), number(right)
    if one is None or other is None:
        return None
    if left.unit == right.unit:
        return _sign(one - other)
    units = _units(left.unit, right.unit)
    return None if units is None else _between(one, units[0], other, units[1])


def number(amount: Amount) -> fmpq | None:
    """Return an amount as a rational in its own unit; a printed decimal stands for what is not rational."""
    written = amount.exact if amount.exact is not None else None if amount.value is None else repr(amount.value)
    try:
        found = Fraction(written or "")
    except (ValueError, ZeroDivisionError):  # absent, or not a number that this program writes
        return None
    return fmpq(found.numerator, found.denominator)


def _units(left: str, right: str) -> tuple[Unit, Unit] | None:
    table = UnitTable.standard()
    try:
        units = table.parse(left), table.parse(right)
    except UnitError:
        return None  # a project's own unit: its size is not in the result
    # points are of a signal in %, per cent are of a change: two quantities, although both have no dimension
    mixed = {"points", "percent"} == {one.kind for one in units}
    return units if units[0].dimension == units[1].dimension and not mixed else None


def _between(one: fmpq, unit: Unit, other: fmpq, another: Unit) -> int | None:
    decibel = [each.kind == "decibel" for each in (unit, another)]
    if all(decibel):
        return _sign(one - other)
    if decibel[0]:
        return _decibels(one, other * another.factor) if another.pi_power == 0 else None
    if decibel[1]:
        found = _between(other, another, one, unit)
        return None if found is None else -found
    return _with_pi(one * unit.factor, other * another.factor, unit.pi_power - another.pi_power)


def _with_pi(one: fmpq, other: fmpq, power: int) -> int | None:
    """Compare one * pi**power with other."""
    if power == 0 or one == 0 or other == 0:
        return _sign(one - other)
    for bits in _BITS:
        with working_precision(bits):
            difference = arb(one) * arb.pi() ** power - arb(other)
            if not difference.contains(0):
                return 1 if difference > 0 else -1
    return None


def _decibels(decibels: fmpq, ratio: fmpq) -> int | None:
    """Compare 10^(decibels/20) with a ratio."""
    exponent = decibels / 20
    if ratio <= 0:
        return 1
    for bits in _BITS:
        with working_precision(bits):
            difference = arb(exponent) - arb(ratio).log() / arb(10).log()
            if not difference.contains(0):
                return 1 if difference > 0 else -1
    return 0 if exponent.q == 1 and ratio == fmpq(10) ** int(exponent.p) else None


def _sign(value: fmpq) -> int:
    return (value > 0) - (value < 0)
