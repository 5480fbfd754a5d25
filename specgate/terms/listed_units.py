"""The closed table of units: factors are exact (SI Brochure, 9th edition, 2019: tables 2, 4, 7 and 8)."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from flint import fmpq

from specgate.terms.decimals import power_of_ten
from specgate.terms.dimensions import (
    AMOUNT,
    CURRENT,
    DIMENSIONLESS,
    LENGTH,
    LUMINOUS_INTENSITY,
    MASS,
    RATE,
    TEMPERATURE,
    TIME,
)
from specgate.terms.unit import ONE, Unit

PREFIXES = {"p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "d": -1, "h": 2, "k": 3, "M": 6, "G": 9}

_FORCE = MASS * LENGTH / TIME**2
_ENERGY = _FORCE * LENGTH
_POWER = _ENERGY / TIME
_VOLTAGE = _POWER / CURRENT
_FLUX = _VOLTAGE * TIME

_ROWS: tuple[tuple[Unit, str], ...] = (
    # SI base units (table 2), with the prefixes (table 7) that are in use
    (Unit("m", fmpq(1), 0, LENGTH), "n u m c d k"),
    (Unit("g", fmpq(1, 1000), 0, MASS), "u m k"),
    (Unit("s", fmpq(1), 0, TIME), "n u m"),
    (Unit("A", fmpq(1), 0, CURRENT), "n u m k"),
    (Unit("K", fmpq(1), 0, TEMPERATURE, kind="temperature_difference"), "u m"),
    (Unit("mol", fmpq(1), 0, AMOUNT), "u m k"),
    (Unit("cd", fmpq(1), 0, LUMINOUS_INTENSITY), "m"),
    # derived units with names of their own (table 4); coulomb is left out: `C` is too often meant as degC
    (Unit("rad", fmpq(1), angle=1), "u m"),
    (Unit("sr", fmpq(1), angle=2), ""),
    (Unit("N", fmpq(1), 0, _FORCE), "u m k M"),
    (Unit("Nm", fmpq(1), 0, _ENERGY), "u m k M"),
    (Unit("Pa", fmpq(1), 0, _FORCE / LENGTH**2), "u m h k M G"),
    (Unit("J", fmpq(1), 0, _ENERGY), "u m k M G"),
    (Unit("W", fmpq(1), 0, _POWER), "n u m k M G"),
    (Unit("V", fmpq(1), 0, _VOLTAGE), "n u m k M"),
    (Unit("ohm", fmpq(1), 0, _VOLTAGE / CURRENT), "u m k M G"),
    (Unit("S", fmpq(1), 0, CURRENT / _VOLTAGE), "n u m"),
    (Unit("F", fmpq(1), 0, CURRENT * TIME / _VOLTAGE), "p n u m"),
    (Unit("H", fmpq(1), 0, _FLUX / CURRENT), "n u m"),
    (Unit("Wb", fmpq(1), 0, _FLUX), "u m"),
    (Unit("T", fmpq(1), 0, _FLUX / LENGTH**2), "n u m"),
    (Unit("lm", fmpq(1), 0, LUMINOUS_INTENSITY, angle=2), ""),
    (Unit("lx", fmpq(1), 0, LUMINOUS_INTENSITY / LENGTH**2, angle=2), ""),
    (Unit("degC", fmpq(1), 0, TEMPERATURE, kind="temperature_difference", zero=fmpq(27315, 100)), ""),
    # cycles: one turn is exactly 2 pi rad, not the 1/s that table 4 makes of the hertz
    (Unit("rev", fmpq(2), 1, angle=1, cycles=True), ""),
    (Unit("Hz", fmpq(2), 1, RATE, angle=1, cycles=True), "u m k M G"),
    (Unit("rpm", fmpq(1, 30), 1, RATE, angle=1, cycles=True), ""),
    # outside the SI (table 8 and its side notes)
    (Unit("min", fmpq(60), 0, TIME), ""),
    (Unit("h", fmpq(3600), 0, TIME), ""),
    (Unit("d", fmpq(86400), 0, TIME), ""),
    (Unit("deg", fmpq(1, 180), 1, angle=1), "m"),
    (Unit("arcmin", fmpq(1, 10800), 1, angle=1), ""),
    (Unit("arcsec", fmpq(1, 648000), 1, angle=1), "m"),
    (Unit("l", fmpq(1, 1000), 0, LENGTH**3), "u m"),
    (Unit("L", fmpq(1, 1000), 0, LENGTH**3), "u m"),
    (Unit("t", fmpq(1000), 0, MASS), ""),
    (Unit("bar", fmpq(100000), 0, _FORCE / LENGTH**2), "u m"),
    (Unit("kn", fmpq(1852, 3600), 0, LENGTH / TIME), ""),
    # standard acceleration of free fall, 3rd CGPM 1901
    (Unit("g0", fmpq(980665, 100000), 0, LENGTH / TIME**2), ""),
    # ratios
    (Unit("%", fmpq(1, 100), 0, DIMENSIONLESS, kind="percent"), ""),
    (Unit("points", fmpq(1, 100), 0, DIMENSIONLESS, kind="points"), ""),
    (Unit("dB", fmpq(1), 0, DIMENSIONLESS, kind="decibel"), ""),
)

OTHER_SPELLINGS = {"\u00b5": "u", "\u03bc": "u", "\u2126": "ohm", "\u03a9": "ohm", "\u00b0": "deg"}
"""Signs that are read as the letters of the table: micro, ohm, degree."""

MISTAKEN = {
    "C": "degC",
    "Celsius": "degC",
    "celsius": "degC",
    "amp": "A",
    "degree": "deg",
    "degrees": "deg",
    "hour": "h",
    "hr": "h",
    "kmh": "km/h",
    "knot": "kn",
    "knots": "kn",
    "kph": "km/h",
    "kt": "kn",
    "lpm": "l/min",
    "meter": "m",
    "metre": "m",
    "minute": "min",
    "msec": "ms",
    "newton": "N",
    "pc": "%",
    "pct": "%",
    "percent": "%",
    "point": "points",
    "radian": "rad",
    "radians": "rad",
    "sec": "s",
    "secs": "s",
    "second": "s",
    "seconds": "s",
    "turn": "rev",
    "turns": "rev",
    "volt": "V",
    "volts": "V",
}
"""Common names of units, and the symbol that the table has for them."""


def _prefixed() -> Iterator[tuple[str, Unit]]:
    for unit, prefixes in _ROWS:
        yield unit.symbol, unit
        for prefix in prefixes.split():
            symbol = prefix + unit.symbol
            yield symbol, replace(unit, symbol=symbol, factor=unit.factor * power_of_ten(PREFIXES[prefix]))


def listed() -> dict[str, Unit]:
    """Return every unit of the table under its symbol. Raises ValueError if two rows give one symbol."""
    table = {"1": ONE}
    for symbol, unit in _prefixed():
        if symbol in table:
            raise ValueError(f"two units are written `{symbol}`")
        table[symbol] = unit
    return table
