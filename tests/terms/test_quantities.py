from __future__ import annotations

import pytest
from flint import fmpq

from specgate.terms.expressions import ExpressionError
from specgate.terms.names import nearest
from specgate.terms.quantities import quantity
from specgate.terms.units import UnitTable

UNITS = UnitTable.standard()


def test_a_quantity_keeps_what_was_written() -> None:
    found = quantity("85 ms", UNITS)
    assert (found.value, found.number, found.unit.symbol, found.as_written) == (fmpq(85, 1000), 85, "ms", "85 ms")


def test_a_plain_number_is_in_unit_one() -> None:
    assert quantity("0.5", UNITS).unit.symbol == "1"


def test_decibels_stay_decibels() -> None:
    found = quantity("-6 dB", UNITS)
    assert (found.value, found.number) == (-6, -6)


def test_a_quantity_is_no_calculation() -> None:
    with pytest.raises(ExpressionError, match="a number and a unit are wanted"):
        quantity("2*85 ms", UNITS)


def test_nearest_names() -> None:
    assert nearest("settling_tim", ["settling_time", "rise_time"]) == "settling_time"
    assert nearest("RPM", ["rpm", "ppm"]) == "rpm"
    assert nearest("zzz", ["settling_time"]) is None
    assert nearest("s" * 1000, ["s"]) is None
