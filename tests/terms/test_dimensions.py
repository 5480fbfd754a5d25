from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.dimensions import DIMENSIONLESS, LENGTH, MASS, TIME, Dimension
from specgate.terms.units import UnitTable

_dimensions = st.tuples(*[st.integers(-9, 9)] * 7).map(Dimension)


@given(_dimensions, _dimensions, _dimensions)
def test_dimensions_form_a_group(a: Dimension, b: Dimension, c: Dimension) -> None:
    assert (a * b) * c == a * (b * c)
    assert a * b == b * a
    assert a / a == DIMENSIONLESS
    assert (a / b) * b == a


@given(_dimensions, st.integers(-5, 5), st.integers(-5, 5))
def test_powers_add(a: Dimension, m: int, n: int) -> None:
    assert a**m * a**n == a ** (m + n)


def test_they_are_shown_in_base_units() -> None:
    assert (MASS * LENGTH**2 / TIME**2).in_base_units == "m^2*kg/s^2"
    assert DIMENSIONLESS.in_base_units == "1"
    assert (TIME**-1).in_base_units == "1/s"


@pytest.mark.parametrize(
    ("unit", "name"),
    [
        *(("kV", "V"), ("mm/s/V", "m/s/V"), ("A", "A"), ("1/V", "1/V"), ("1/min", "1/s"), ("%", "1")),
        *(("kN*m", "N*m"), ("kg/s^2", "N/m"), ("kg*m^2", "m^2*kg"), ("J/kg", "m^2/s^2"), ("l/min", "m^3/s")),
        *(("V/(mm*s)", "V/m/s"), ("W/K", "W/K"), ("kg/m3", "kg/m^3"), ("V/A", "ohm"), ("m^3/s/V", "m^3/s/V")),
    ],
)
def test_a_short_name_is_what_people_write(unit: str, name: str) -> None:
    assert str(UnitTable.standard().parse(unit).dimension) == name


@given(_dimensions)
def test_a_short_name_is_a_unit_of_that_dimension(dimension: Dimension) -> None:
    found = UnitTable.standard().parse(str(dimension))
    assert found.dimension == dimension
    assert found.factor == 1
