"""Printed numbers: the rounding is that of the true value, the bounds are outward, zero is said only where proved."""

from __future__ import annotations

from collections.abc import Callable
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_EVEN, Context, Decimal

import pytest
from flint import arb, fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.enclosed import ends, in_unit, printed, printed_exact, rounded, to_float
from specgate.terms.precision import working_precision
from specgate.terms.units import UnitTable
from specgate.terms.verdicts import Proof

UNITS = UnitTable.standard()


def known(make: Callable[[], arb]) -> Callable[[int], arb]:
    def refine(bits: int) -> arb:
        with working_precision(bits):
            return make()

    return refine


def vague(middle: str, radius: str) -> Callable[[int], arb]:
    return lambda bits: arb(middle, radius)


decimals = st.decimals(allow_nan=False, allow_infinity=False, places=None).filter(
    lambda d: d != 0 and -300 < d.adjusted() < 300
)


@given(decimals, st.integers(2, 17))
def test_rounding_agrees_with_the_decimal_module(value: Decimal, digits: int) -> None:
    exact = fmpq(*value.as_integer_ratio())
    for direction, mode in (("nearest", ROUND_HALF_EVEN), ("down", ROUND_FLOOR), ("up", ROUND_CEILING)):
        expected = Context(prec=digits, rounding=mode).plus(value)
        assert rounded(exact, direction, digits) == fmpq(*expected.as_integer_ratio())  # type: ignore[arg-type]


def test_the_example_of_the_results_format() -> None:
    settling = printed(vague("3.21840084157884", "1e-15"))
    assert (settling.value, settling.lower, settling.upper) == (3.21840084158, 3.21840084157, 3.21840084158)
    overshoot = printed(vague("11.61841937094997", "1e-14"))
    assert (overshoot.value, overshoot.lower, overshoot.upper) == (11.6184193709, 11.6184193709, 11.6184193710)


def test_refines_until_the_rounding_is_unique() -> None:
    tried: list[int] = []

    def refine(bits: int) -> arb:
        tried.append(bits)
        with working_precision(bits):
            return arb(fmpq(1000000000005, 10**12) + fmpq(1, 10**25))

    assert printed(refine).value == 1.00000000001
    assert tried == [64, 128]


def test_a_tie_goes_to_the_even_digit_whichever_way_the_ball_leans() -> None:
    for lean in ("1e-90", "-1e-90"):
        ball = known(lambda lean=lean: arb(fmpq(1000000000005, 10**12)) + arb(lean) + arb(0, "1e-80"))  # type: ignore[misc]
        assert printed(ball).value == 1.0


def test_a_decimal_that_is_only_enclosed_has_bounds_on_both_sides() -> None:
    result = printed(known(lambda: arb(fmpq(1, 20)).sqrt() ** 2))
    assert (result.lower, result.value, result.upper) == (0.0499999999999, 0.05, 0.0500000000001)
    assert result.proof is Proof.ENCLOSED


def test_nearly_zero_is_not_said_to_be_zero() -> None:
    result = printed(vague("1e-94", "1e-96"), fmpq(1))
    assert (result.value, result.lower, result.upper, result.exact) == (0.0, 0.0, 1e-12, None)
    either = printed(vague("0", "1e-30"), fmpq(2))
    assert (either.value, either.lower, either.upper) == (0.0, -2e-12, 2e-12)


def test_a_small_number_with_nothing_to_compare_it_with_keeps_its_digits() -> None:
    assert printed(known(lambda: arb(fmpq(1, 3 * 10**90)))).value == 3.33333333333e-91


def test_a_ball_that_stays_wide_shows_only_the_digits_it_has() -> None:
    result = printed(vague("3.00000123456", "1e-5"))
    assert result.value == 3.0000012
    assert result.lower is not None
    assert result.upper is not None
    assert result.lower <= 3.00000123456 - 1e-5
    assert result.upper >= 3.00000123456 + 1e-5
    assert result.upper - result.lower < 2.2e-5


@given(decimals, st.floats(0, 1e-3))
def test_bounds_always_contain_the_ball(middle: Decimal, relative: float) -> None:
    centre = fmpq(*middle.as_integer_ratio())
    ball = arb(centre) + arb(0, abs(arb(centre)) * relative)
    low, high = ends(ball)
    result = printed(lambda bits: ball)
    assert result.lower is not None
    assert result.upper is not None
    assert fmpq(*Decimal(repr(result.lower)).as_integer_ratio()) <= low
    assert fmpq(*Decimal(repr(result.upper)).as_integer_ratio()) >= high
    assert result.lower <= result.value <= result.upper


def test_exact_values_carry_their_fraction_and_no_bounds() -> None:
    result = printed_exact(fmpq(1, 20))
    assert (result.value, result.lower, result.upper, result.exact, result.proof) == (
        0.05,
        None,
        None,
        "1/20",
        Proof.EXACT,
    )
    assert printed_exact(fmpq(-7)).exact == "-7"


@pytest.mark.parametrize(
    ("unit", "value", "expected"),
    [
        ("mm", arb(fmpq(1, 20)), 50.0),
        ("%", arb(fmpq(1, 20)), 5.0),
        ("deg", arb.pi() / 4, 45.0),
        ("Hz", arb(10), 1.59154943092),  # 10 rad/s over 2 pi
        ("dB", arb(2), 6.02059991328),  # 20 log10 2
    ],
)
def test_units(unit: str, value: arb, expected: float) -> None:
    assert printed(in_unit(lambda bits: value, UNITS.parse(unit))).value == pytest.approx(expected, rel=1e-11)


def test_what_is_too_large_to_print_says_so() -> None:
    for exponent in (500, 10**7):
        with pytest.raises(OverflowError, match="too large to be printed"):
            printed(known(lambda exponent=exponent: arb(exponent).exp() ** 3))  # type: ignore[misc]


def test_a_middle_or_radius_far_below_every_float_prints() -> None:
    tiny = (arb(-(10**9))).exp()
    assert printed(lambda bits: tiny).value == 0.0
    assert printed(lambda bits: arb(2) + arb(0, 1) * tiny).value == 2.0
    low, high = ends(arb(2) + arb(0, 1) * tiny)
    assert low < 2 < high


def test_out_of_the_range_of_floats() -> None:
    assert to_float(fmpq(10) ** 400) == 1.7976931348623157e308
    assert to_float(-(fmpq(10) ** 400)) == -1.7976931348623157e308
    assert to_float(fmpq(1, 10) ** 400) == 0.0
