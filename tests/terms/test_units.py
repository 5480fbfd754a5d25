"""The closed table, its texts, and a project's own units."""

from __future__ import annotations

import contextlib
from collections.abc import Callable

import pytest
from flint import fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.dimensions import CURRENT, DIMENSIONLESS, LENGTH, MASS, RATE, TEMPERATURE, TIME
from specgate.terms.units import PI, PRECISE_PI, UnitError, UnitTable, frequency_problem

UNITS = UnitTable.standard()
Work = Callable[[Callable[[], object]], int]
_symbols = st.sampled_from(sorted(symbol for symbol, unit in UNITS.units.items() if unit.kind != "decibel"))


def test_pi_is_pi_to_the_digits_that_are_kept() -> None:
    # Archimedes' constant: OEIS A000796
    assert abs(PRECISE_PI - PI) < fmpq(1, 10**59)
    assert fmpq(314159265358979323846, 10**20) < PI < fmpq(314159265358979323847, 10**20)


@pytest.mark.parametrize(
    ("text", "factor", "dimension"),
    [
        ("m/s/V", fmpq(1), LENGTH / TIME / (MASS * LENGTH**2 / TIME**3 / CURRENT)),
        ("V/(m*s)", fmpq(1), MASS * LENGTH / TIME**4 / CURRENT),
        ("N*m", fmpq(1), MASS * LENGTH**2 / TIME**2),
        ("Nm", fmpq(1), MASS * LENGTH**2 / TIME**2),
        ("m3/h", fmpq(1, 3600), LENGTH**3 / TIME),
        ("m^3/h", fmpq(1, 3600), LENGTH**3 / TIME),
        ("m³/h", fmpq(1, 3600), LENGTH**3 / TIME),
        ("m**3/h", fmpq(1, 3600), LENGTH**3 / TIME),
        ("l/min", fmpq(1, 60000), LENGTH**3 / TIME),
        ("mm2", fmpq(1, 10**6), LENGTH**2),
        ("s^-1", fmpq(1), TIME**-1),
        ("1/s", fmpq(1), TIME**-1),
        ("1", fmpq(1), DIMENSIONLESS),
        ("K/min", fmpq(1, 60), TEMPERATURE / TIME),
        ("degC/min", fmpq(1, 60), TEMPERATURE / TIME),
        ("m/%", fmpq(100), LENGTH),
        ("km/h", fmpq(5, 18), LENGTH / TIME),
        ("µm", fmpq(1, 10**6), LENGTH),
        ("((m))/(s*(s))", fmpq(1), LENGTH / TIME**2),
    ],
)
def test_unit_texts(text: str, factor: fmpq, dimension: object) -> None:
    unit = UNITS.parse(text)
    assert (unit.factor, unit.pi_power, unit.dimension, unit.symbol) == (factor, 0, dimension, text)


def test_g0_and_the_knot_have_their_defined_values() -> None:
    # standard acceleration of free fall: 3rd CGPM (1901), CR 70; nautical mile of 1852 m: SI Brochure 8th ed., table 8
    assert UNITS.parse("g0").factor == fmpq(980665, 100000)
    assert UNITS.parse("kn").factor == fmpq(1852, 3600)


@pytest.mark.parametrize("text", ["Hz", "rev/s", "kHz", "rpm", "rev/min", "rev/h"])
def test_cycles_are_two_pi_radians_each(text: str) -> None:
    unit = UNITS.parse(text)
    seconds = {"Hz": fmpq(1), "rev/s": fmpq(1), "kHz": fmpq(1, 1000), "rev/h": fmpq(3600)}.get(text, fmpq(60))
    assert (unit.factor, unit.pi_power, unit.dimension, unit.angle, unit.cycles) == (2 / seconds, 1, RATE, 1, True)
    assert unit.si_factor == 2 * PI / seconds


def test_a_frequency_says_what_it_counts() -> None:
    for text in ("rad/s", "Hz", "rpm", "deg/s", "rev/min"):
        assert frequency_problem(UNITS.parse(text)) is None
    assert "radians or cycles" in (frequency_problem(UNITS.parse("1/s")) or "")
    assert "radians or cycles" in (frequency_problem(UNITS.parse("1/min")) or "")
    assert "not `m`" in (frequency_problem(UNITS.parse("m")) or "")


@given(_symbols, _symbols)
def test_the_symbol_of_a_product_or_quotient_can_be_read_again(one: str, other: str) -> None:
    left, right = UNITS.parse(one), UNITS.parse(other)
    for unit in (left * right, left / right, left / (left * right), (left / right) * right):
        again = UNITS.parse(unit.symbol)
        assert (again.si_factor, again.dimension, again.angle) == (unit.si_factor, unit.dimension, unit.angle)


@pytest.mark.parametrize(
    ("text", "nearest"),
    [("sec", "s"), ("C", "degC"), ("RPM", "rpm"), ("hz", "Hz"), ("Ohm", "ohm"), ("percent", "%"), ("m/sec", "s")],
)
def test_a_near_miss_is_named(text: str, nearest: str) -> None:
    with pytest.raises(UnitError, match=f"did you mean `{nearest}`") as caught:
        UNITS.parse(text)
    assert caught.value.nearest == nearest


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "a unit is wanted"),
        ("V/m*s", "two ways"),
        ("dB/s", "dB stands alone"),
        ("dB^2", "dB stands alone"),
        ("m s", "a space"),
        ("5 m", "space|number"),
        ("5", "a number has no place"),
        ("m^0", "powers of a unit"),
        ("m^99", "powers of a unit"),
        ("m12", "powers of a unit"),
        ("m*", "a symbol is wanted at its end"),
        ("m//s", "a symbol is wanted instead of `/`"),
        ("(m", "closing bracket"),
        ("m)", "wanted before"),
        ("m$", "has no place"),
        ("__import__('os')", "has no place"),
        ("m" * 61, "too long"),
        ("m\x00", "has no place"),
        ("zzz", "project: units"),
    ],
)
def test_what_is_no_unit_says_why(text: str, message: str) -> None:
    with pytest.raises(UnitError, match=message):
        UNITS.parse(text)


@given(st.text(max_size=80))
def test_any_text_is_a_unit_or_an_error_after_little_work(work: Work, text: str) -> None:
    def read() -> None:
        with contextlib.suppress(UnitError):
            assert UNITS.parse(text).symbol == text.strip()

    assert work(read) < 20_000


class TestOwnUnits:
    def test_a_count_of_an_encoder(self) -> None:
        table, problems = UNITS.with_units({"count": "1/65536 rev"})
        count = table.parse("count")
        assert not problems
        assert (count.factor, count.pi_power, count.angle, count.cycles) == (fmpq(2, 65536), 1, 1, True)
        assert table.parse("count/ms").dimension == RATE
        assert table.own == ("count",)
        assert not UNITS.is_unit("count")

    def test_the_order_of_definitions_does_not_matter(self) -> None:
        table, problems = UNITS.with_units({"pallet": "48 box", "box": "12 item", "item": "1"})
        assert not problems
        assert table.parse("pallet").factor == 576

    @pytest.mark.parametrize(
        ("name", "text", "message"),
        [
            ("m", "2 mm", "already a unit"),
            ("s", "2 ms", "already a unit"),
            ("pi", "3 rad", "cannot be the name"),
            ("2x", "1 m", "cannot be the name"),
            ("ring", "3 ring", "not a listed unit"),
            ("nil", "0 m", "greater than zero"),
            ("nil", "1/0 m", "greater than zero"),
            ("nil", "-2 m", "greater than zero"),
            ("loud", "3 dB", "multiple of dB"),
            ("huge", "1e999999999 m", "out of reach"),
            ("word", "many metres", "does not define a unit"),
        ],
    )
    def test_what_does_not_define_a_unit_says_why(self, name: str, text: str, message: str) -> None:
        table, problems = UNITS.with_units({name: text})
        assert table.own == ()
        assert list(problems) == [name]
        assert message in problems[name].message

    def test_a_circle_of_definitions_is_an_error_for_each(self) -> None:
        _, problems = UNITS.with_units({"here": "2 there", "there": "2 here", "good": "5 m"})
        assert sorted(problems) == ["here", "there"]


@pytest.mark.parametrize(
    ("written", "coherent"),
    [
        *(("mm/s/V", "m/s/V"), ("kV/mm", "V/m"), ("cm2/s", "m2/s"), ("l/min", "m^3/s"), ("mV/(mm*ms)", "V/(m*s)")),
        *(("bar", "Pa"), ("kN*mm", "N*m"), ("g", "kg"), ("arcmin/V", "rad/V"), ("kn/V", "(m/s)/V"), ("%", "1")),
    ],
)
def test_a_coherent_unit_is_named_part_by_part(written: str, coherent: str) -> None:
    table = UnitTable.standard()
    found = table.coherent(table.parse(written))
    assert found.symbol == coherent
    assert (found.dimension, found.angle) == (table.parse(written).dimension, table.parse(written).angle)
    assert found.factor == 1
    assert found.pi_power == 0
