"""Literals are the rationals that they are written as."""

from __future__ import annotations

from decimal import Decimal
from fractions import Fraction

import pytest
from flint import fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.decimals import DIGITS, EXPONENT, DecimalError, exact_decimal, power_of_ten


def _fraction(value: fmpq) -> Fraction:
    return Fraction(int(value.p), int(value.q))


@given(st.decimals(allow_nan=False, allow_infinity=False, places=30, min_value=-(10**40), max_value=10**40))
def test_a_literal_is_the_fraction_that_python_reads_in_it(number: Decimal) -> None:
    assert _fraction(exact_decimal(str(number))) == Fraction(number)


@pytest.mark.parametrize("text", ["1e3", "1.0e3", "1000", "1000.", "+1000", "1E+3", "0001000", ".1e4"])
def test_spellings_of_one_number_are_one_number(text: str) -> None:
    assert exact_decimal(text) == 1000


def test_a_tenth_is_no_binary_float() -> None:
    assert exact_decimal("0.1") == fmpq(1, 10)
    assert exact_decimal("0.1") != fmpq(*(0.1).as_integer_ratio())


@pytest.mark.parametrize(
    "text",
    ["", ".", "-", "+-1", "1e", "e3", "1.2.3", "1_000", "0x10", "nan", "inf", "12:30", "1,5", "٣", "1 ", "1e1.5"],
)
def test_what_is_no_decimal_is_refused(text: str) -> None:
    with pytest.raises(DecimalError, match="is not a number"):
        exact_decimal(text)


@pytest.mark.parametrize("text", ["1e999999999", "1e-999999999", f"1e{EXPONENT + 1}", "1e" + "9" * 5000])
def test_powers_out_of_reach_are_refused_before_they_are_computed(text: str) -> None:
    with pytest.raises(DecimalError, match="out of reach"):
        exact_decimal(text)


def test_the_ends_of_the_range_can_be_written() -> None:
    assert exact_decimal(f"1e{EXPONENT}") == power_of_ten(EXPONENT)
    assert exact_decimal(f"1e-{EXPONENT}") == power_of_ten(-EXPONENT)
    assert exact_decimal("1" * DIGITS).q == 1
    with pytest.raises(DecimalError, match="digits"):
        exact_decimal("1" * (DIGITS + 1))
