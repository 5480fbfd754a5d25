"""Every row of the table against pint, and the rows where pint's defaults mislead against published figures."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pint
import pytest
from flint import fmpq

from specgate.terms.listed_units import PREFIXES
from specgate.terms.units import PI, UnitTable

UNITS = UnitTable.standard()

_NAMES = {
    "m": "meter",
    "g": "gram",
    "s": "second",
    "A": "ampere",
    "K": "kelvin",
    "mol": "mole",
    "cd": "candela",
    "rad": "radian",
    "sr": "steradian",
    "N": "newton",
    "Pa": "pascal",
    "J": "joule",
    "W": "watt",
    "V": "volt",
    "ohm": "ohm",
    "S": "siemens",
    "F": "farad",
    "H": "henry",
    "Wb": "weber",
    "T": "tesla",
    "lm": "lumen",
    "lx": "lux",
    "degC": "delta_degree_Celsius",
    "rev": "revolution",
    "rpm": "revolutions_per_minute",
    "min": "minute",
    "h": "hour",
    "d": "day",
    "deg": "degree",
    "arcmin": "arcminute",
    "arcsec": "arcsecond",
    "l": "liter",
    "L": "liter",
    "t": "metric_ton",
    "bar": "bar",
    "kn": "knot",
    "g0": "standard_gravity",
    "%": "percent",
}
"""Names that pint has for the rows; those that it lacks or misleads in are tested below, each by its source."""

_APART = {"1", "Hz", "Nm", "points", "dB"}
_PREFIX_NAMES = {
    "p": "pico",
    "n": "nano",
    "u": "micro",
    "m": "milli",
    "c": "centi",
    "d": "deci",
    "h": "hecto",
    "k": "kilo",
    "M": "mega",
    "G": "giga",
}
_BASES = ("[length]", "[mass]", "[time]", "[current]", "[temperature]", "[substance]", "[luminosity]")


def _split(symbol: str) -> tuple[str, str]:
    """Return prefix and row of a symbol; the row comes first, so that `min` is no milli-inch."""
    if symbol in _NAMES or symbol in _APART:
        return "", symbol
    return symbol[0], symbol[1:]


_ROWS = [symbol for symbol in UNITS.units if _split(symbol)[1] not in _APART]


@pytest.fixture(scope="module")
def registry() -> Any:
    return pint.UnitRegistry()


def test_every_row_is_compared_or_named_apart() -> None:
    assert {_split(symbol)[1] for symbol in UNITS.units} == set(_NAMES) | _APART


@pytest.mark.parametrize("symbol", _ROWS)
def test_row_against_pint(symbol: str, registry: Any) -> None:
    prefix, row = _split(symbol)
    theirs = registry.Quantity(1.0, _PREFIX_NAMES.get(prefix, "") + _NAMES[row]).to_base_units()
    base = {name: theirs.dimensionality.get(name, 0) for name in _BASES}
    ours = UNITS.units[symbol]
    assert ours.dimension.exponents == tuple(int(base[name]) for name in _BASES)
    in_base = _to_coherent(theirs)
    size = Fraction(int(ours.si_factor.p), int(ours.si_factor.q))
    assert float(size) == pytest.approx(in_base, rel=1e-14)


def _to_coherent(quantity: Any) -> float:
    """Return the size in coherent SI: pint's base units are metre, kilogram (or gram), second …"""
    text = str(quantity.units)
    assert "gram" not in text.replace("kilogram", ""), text
    return float(quantity.magnitude)


def test_hertz_is_two_pi_radian_per_second_where_pint_says_one(registry: Any) -> None:
    # SI Brochure, 9th ed. (2019), 2.3.4: by definition frequency and angular frequency differ by a factor of 2 pi;
    # ISO 80000-3:2019, item 3-18: angular frequency = 2 pi times frequency
    assert registry.Quantity(20, "Hz").to("rad/s").magnitude == pytest.approx(20)
    assert UNITS.parse("Hz").si_factor * 20 == 40 * PI
    assert (UNITS.parse("kHz").factor, UNITS.parse("kHz").pi_power) == (fmpq(2000), 1)


def test_revolutions_per_minute_in_hertz(registry: Any) -> None:
    # 1500 rpm are 25 turns a second: 25 Hz, where pint gives 157 Hz
    assert registry.Quantity(1500, "rpm").to("Hz").magnitude == pytest.approx(157.07963)
    assert 1500 * UNITS.parse("rpm").si_factor / UNITS.parse("Hz").si_factor == 25


def test_newton_metre_is_one_unit(registry: Any) -> None:
    # SI Brochure, table 5: moment of force, N m; pint reads `Nm` as something else or not at all
    joule = UNITS.parse("J")
    assert (UNITS.parse("Nm").factor, UNITS.parse("Nm").dimension) == (joule.factor, joule.dimension)
    assert UNITS.parse("kNm").factor == 1000


def test_coulomb_and_degree_celsius_are_not_confused(registry: Any) -> None:
    assert str(registry.Quantity(1, "C").units) == "coulomb"
    assert not UNITS.is_unit("C")


def test_a_difference_of_a_degree_celsius_is_a_kelvin() -> None:
    # SI Brochure, 2.3.1: the degree Celsius is by definition equal in magnitude to the kelvin; t/degC = T/K - 273.15
    celsius = UNITS.parse("degC")
    assert (celsius.factor, celsius.zero) == (fmpq(1), fmpq(27315, 100))
    assert celsius.kind == UNITS.parse("K").kind == "temperature_difference"


def test_percentage_points_are_hundredths() -> None:
    assert UNITS.parse("points").factor == UNITS.parse("%").factor == fmpq(1, 100)
    assert (UNITS.parse("points").kind, UNITS.parse("%").kind) == ("points", "percent")


@pytest.mark.parametrize(("prefix", "power"), PREFIXES.items())
def test_prefixes(prefix: str, power: int) -> None:
    # SI Brochure, table 7
    published = {"p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "d": -1, "h": 2, "k": 3, "M": 6, "G": 9}
    assert power == published[prefix]
