"""Numbers as they are printed."""

from __future__ import annotations

from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from specgate.report import digits
from specgate.report.parts import shown
from specgate.review.types import Amount, LimitReview, Pole, ReserveReview, Result


def at_most(value: float, unit: str = "s") -> LimitReview:
    return LimitReview(at_most=Amount(value, unit))


@pytest.mark.parametrize(
    ("found", "limit", "printed"),
    [
        (Result(3.21840084158, 3.21840084157, 3.21840084158, unit="s", proof="enclosed"), at_most(1.2), "3.218"),
        # Two digits of what is left always show.
        (Result(2.06758321404, 2.067583214, 2.06758321405, unit="s", proof="enclosed"), at_most(2.0676), "2.067583"),
        # A wide interval decides fewer digits.
        (Result(11.62, 11.1, 11.9, unit="%", proof="enclosed"), at_most(20.0, "%"), "12"),
        # But a decided result never reads as the limit itself.
        (Result(99.99998, 99.99997, 99.999985, unit="%", proof="enclosed"), at_most(100.0, "%"), "99.99998"),
        (Result(0.05, exact="1/20", unit="m", proof="exact"), at_most(1.0, "m"), "0.05"),
        (Result(0.333333333333, exact="1/3", unit="m", proof="exact"), at_most(1.0, "m"), "0.3333"),
        (Result(-12345.6789, -12345.679, -12345.6788, unit="Pa", proof="enclosed"), at_most(1.0, "Pa"), "−12346"),
        (Result(1.23456e-9, 1.2345e-9, 1.2346e-9, unit="m", proof="enclosed"), at_most(1.0, "m"), "1.235×10⁻⁹"),
        (Result(4.5678e8, 4.5677e8, 4.5679e8, unit="Pa", proof="enclosed"), at_most(1.0, "Pa"), "4.568×10⁸"),
        (Result(0.0, 0.0, 1e-12, unit="%", proof="enclosed"), at_most(5.0, "%"), "0"),
        (Result(2, proof="exact"), LimitReview(equals=2), "2"),
        (Result(True, proof="exact"), LimitReview(equals=True), "yes"),
        (Result(None, reason="grows"), at_most(1.0), "none"),
        (Result(None, infinite=True, proof="exact"), LimitReview(at_least=Amount(6.0, "dB")), "unlimited"),
    ],
)
def test_a_result_shows_the_digits_that_are_proved_and_matter(found: Result, limit: LimitReview, printed: str) -> None:
    assert shown.result(found, limit).value == printed


def test_a_reserve_ends_at_the_last_digit_of_its_result() -> None:
    found = Result(3.21840084158, 3.21840084157, 3.21840084158, unit="s", proof="enclosed")
    assert shown.reserve(ReserveReview(-2.01840084158, "s"), found, at_most(1.2)) == "−2.018"
    close = Result(2.06758321404, 2.067583214, 2.06758321405, unit="s", proof="enclosed")
    assert shown.reserve(ReserveReview(0.00001678596, "s"), close, at_most(2.0676)) == "+0.000017"


def test_a_result_beyond_all_digits_of_its_reserve_does_not_ask_for_them() -> None:
    tiny = Result(1.2345e-40, 1.2344e-40, 1.2346e-40, unit="1", proof="enclosed")
    assert shown.reserve(ReserveReview(9.0, "1"), tiny, at_most(9.0)) == "+9.000"


def test_the_bound_is_the_half_width_rounded_up() -> None:
    found = Result(3.21840084158, 3.21840084157, 3.218400841581, unit="s", proof="enclosed")
    assert shown.result(found).bound == "± 1×10⁻¹¹"
    assert digits.half_width(1.0, 0.99, 1.0101) == "0.02"


@given(st.floats(1e-6, 1e6), st.floats(1e-9, 0.5))
def test_the_printed_bound_never_understates(value: float, width: float) -> None:
    low, high = value * (1 - width), value * (1 + width)
    half = (
        digits.half_width(value, low, high).replace("×10", "e").translate(str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-"))
    )
    exact = [digits.decimal(v) for v in (value, low, high)]
    assert Decimal(half) >= max(exact[2] - exact[0], exact[0] - exact[1])


@given(st.decimals("0.001", "1000", places=6), st.decimals("0.001", "1000", places=6))
def test_what_is_printed_lies_on_the_same_side_of_the_limit(value: Decimal, limit: Decimal) -> None:
    """A board that reads the printed digits alone must come to the verdict that the engine came to."""
    found = Result(float(value), float(value), float(value), unit="s", proof="enclosed")
    printed = Decimal(shown.result(found, at_most(float(limit))).value.replace("−", "-"))
    assert (printed > limit) == (value > limit)
    assert (printed < limit) == (value < limit)


def test_numbers_meet_at_the_decimal_sign() -> None:
    texts = digits.aligned(["3.218", "400", "−2.07", "none", "1.2×10⁻⁹"])
    assert texts == ("3.218", "400\u2008\u2007\u2007\u2007", "−2.07\u2007", "none", "1.2×10⁻⁹")
    assert digits.aligned(["1", "20"]) == ("1", "20")


@pytest.mark.parametrize(
    ("coefficients", "printed"),
    [
        (("1", "52/5", "65", "122/5"), "s³ + 10.4 s² + 65 s + 24.4"),
        (("-1", "0", "-1/3"), "−s² − 1/3"),
        (("2", "-1", "0"), "2 s² − s"),
        (("1",), "1"),
        (("-7",), "−7"),
        ((), "0"),
        (("123456789/1000000007", "0"), "≈ 0.123457 s"),
    ],
)
def test_polynomials(coefficients: tuple[str, ...], printed: str) -> None:
    assert shown.polynomial(coefficients) == printed


def test_poles() -> None:
    assert shown.pole(Pole(-0.4, 0.0, 1, 0.0)) == "−0.4"
    assert shown.pole(Pole(-5.0, -6.0, 1, 1e-12)) == "−5 − 6j"


@pytest.mark.parametrize(
    ("ratio", "printed"), [(-1.682, "−168 %"), (0.0327, "3.3 %"), (0.00001, "0.0010 %"), (0.0, "0 %"), (0.5, "50 %")]
)
def test_per_cent(ratio: float, printed: str) -> None:
    assert digits.percent(ratio) == printed
