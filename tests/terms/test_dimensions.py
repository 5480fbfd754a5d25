from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.dimensions import DIMENSIONLESS, LENGTH, MASS, TIME, Dimension

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
    assert str(MASS * LENGTH**2 / TIME**2) == "m^2*kg/s^2"
    assert str(DIMENSIONLESS) == "1"
    assert str(TIME**-1) == "1/s"
