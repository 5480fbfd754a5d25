"""Expressions against Python's own exact arithmetic, their dimensions, and what they refuse."""

from __future__ import annotations

import operator
from fractions import Fraction

import mpmath
import pytest
from flint import fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.dimensions import DIMENSIONLESS, LENGTH, RATE, TIME
from specgate.terms.expressions import (
    PLAIN,
    ExpressionError,
    Number,
    PercentOf,
    dimension,
    evaluate,
    literal_unit,
    names,
    parse,
    references,
)
from specgate.terms.units import PI, PRECISE_PI, UnitTable

UNITS = UnitTable.standard()
NAMES = {"lag": fmpq(85, 1000), "gain": fmpq(-7, 3), "hoist.lag": fmpq(1, 4)}


def value(text: str, pi: fmpq = PI) -> fmpq:
    return evaluate(parse(text, UNITS), NAMES, pi)


def _fraction(number: fmpq) -> Fraction:
    return Fraction(int(number.p), int(number.q))


# --- property: a text that is built together with its value ------------------------------------------------

Built = tuple[str, Fraction | None]
"""A text and what it is worth by Python's fractions; None once something was divided by zero."""

_leaves = st.one_of(
    st.integers(0, 10**6).map(lambda n: (str(n), Fraction(n))),
    st.decimals(0, 1000, places=3, allow_nan=False, allow_infinity=False).map(lambda d: (str(d), Fraction(d))),
    st.sampled_from(["lag", "gain"]).map(lambda name: (name, _fraction(NAMES[name]))),
)
_PYTHON = {"+": operator.add, "-": operator.sub, "*": operator.mul, "/": operator.truediv}


def _binary(left: Built, sign: str, right: Built, space: str) -> Built:
    text = f"({left[0]}){space}{sign}{space}({right[0]})"
    if left[1] is None or right[1] is None or (sign == "/" and right[1] == 0):
        return text, None
    return text, _PYTHON[sign](left[1], right[1])


def _power(base: Built, exponent: int) -> Built:
    text = f"({base[0]})**{exponent}"
    if base[1] is None or (base[1] == 0 and exponent < 0):
        return text, None
    return text, base[1] ** exponent


def _extended(inner: st.SearchStrategy[Built]) -> st.SearchStrategy[Built]:
    return st.one_of(
        st.builds(_binary, inner, st.sampled_from("+-*/"), inner, st.sampled_from(["", " "])),
        inner.map(lambda built: (f"-({built[0]})", None if built[1] is None else -built[1])),
        st.builds(_power, inner, st.integers(-3, 4)),
    )


@given(st.recursive(_leaves, _extended, max_leaves=12))
def test_agrees_with_python_on_fractions(built: Built) -> None:
    text, expected = built
    try:
        found = value(text)
    except ExpressionError as refused:
        said = refused.message
    else:
        assert _fraction(found) == expected
        return
    assert ("division by zero" in said and expected is None) or "too large" in said or "at most" in said


_WORTH = {"+": 1, "-": 1, "*": 2, "/": 2}


@given(st.lists(st.tuples(st.sampled_from("+-*/"), st.integers(1, 99)), max_size=30), st.integers(1, 99))
def test_precedence_without_brackets(rest: list[tuple[str, int]], first: int) -> None:
    # products before sums, each from left to right
    terms = [Fraction(first)]
    text = str(first)
    for sign, number in rest:
        text += f" {sign} {number}"
        if _WORTH[sign] == 1:
            terms.append(Fraction(number if sign == "+" else -number))
        else:
            terms[-1] = _PYTHON[sign](terms[-1], Fraction(number))
    assert _fraction(value(text)) == sum(terms)


# --- values ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("85 ms", fmpq(85, 1000)),
        ("0.042 m/s/V", fmpq(42, 1000)),
        ("lag + 5 ms", fmpq(9, 100)),
        ("2*lag", fmpq(17, 100)),
        ("lag*2 + 1 ms/2", None),
        ("hoist.lag/2", fmpq(1, 8)),
        ("-2**2", fmpq(-4)),
        ("(-2)**2", fmpq(4)),
        ("2**-3", fmpq(1, 8)),
        ("2**(3)", fmpq(8)),
        ("2 - 3 - 4", fmpq(-5)),
        ("24/4/3", fmpq(2)),
        ("2 + 3*4", fmpq(14)),
        ("-3 + 5", fmpq(2)),
        ("2*-3", fmpq(-6)),
        ("--3", fmpq(3)),
        ("+ 3", fmpq(3)),
        ("8 %", fmpq(8, 100)),
        ("3 1/s", fmpq(3)),
        ("5 V/(m*s)", fmpq(5)),
        ("(2 m)**2", fmpq(4)),
        ("2 mm**2", fmpq(2, 10**6)),
        ("1.5e-3", fmpq(3, 2000)),
        ("20 degC", fmpq(20)),
        ("20 dB", fmpq(10)),
        ("-40 dB", fmpq(1, 100)),
        ("(1 m)/4", fmpq(1, 4)),
        ("10 % of lag", fmpq(85, 10000)),
        ("10 % of the lag", fmpq(85, 10000)),
        ("2 * 10 % of lag", fmpq(17, 1000)),
    ],
)
def test_values(text: str, expected: fmpq | None) -> None:
    if expected is None:
        with pytest.raises(ExpressionError, match="runs to the next space"):
            value(text)
    else:
        assert value(text) == expected


def test_hertz_and_pi_rest_on_the_same_decimal() -> None:
    assert value("1 Hz") == value("2*pi") == 2 * PI
    assert value("180 deg") == PI
    assert value("1 Hz", PRECISE_PI) == 2 * PRECISE_PI
    assert value("(1 Hz)/(2*pi)", PRECISE_PI) == 1


@pytest.mark.parametrize("text", ["pi", "2 Hz", "1 - 3 rpm", "(30 deg)/2", "6 dB", "-6 dB", "lag*pi"])
def test_irrational_constants_are_known_to_be_rounded(text: str) -> None:
    assert parse(text, UNITS).depends_on_pi


@pytest.mark.parametrize("text", ["3", "2 rad/s", "lag", "20 dB", "-60 dB", "5 %"])
def test_rational_constants_are_not(text: str) -> None:
    assert not parse(text, UNITS).depends_on_pi


def test_the_sign_belongs_to_the_number_of_decibels() -> None:
    quieter, louder = value("-6 dB"), value("6 dB")
    assert abs(quieter * louder - 1) < fmpq(1, 10**55)
    with mpmath.workdps(70):
        assert str(mpmath.nstr(mpmath.mpf(10) ** (mpmath.mpf(6) / 20), 59))[:58] == _digits(louder, 57)


def _digits(number: fmpq, places: int) -> str:
    scaled = int(number.p) * 10 ** (places - 1) // int(number.q)
    return f"{str(scaled)[0]}.{str(scaled)[1:]}"


def test_decibels_have_as_many_digits_as_pi() -> None:
    coarse, fine = value("6 dB"), value("6 dB", PRECISE_PI)
    assert 0 < abs(coarse - fine) < fmpq(1, 10**58)
    # the tenth power of 10^(6/20) is 1000
    assert abs(fine**10 - 1000) < fmpq(1, 10**94)


def test_names_and_where_they_stand() -> None:
    tree = parse("lag + 2*gain - lag/hoist.lag + 5 % of span", UNITS)
    assert names(tree) == ("lag", "gain", "hoist.lag", "span")
    assert [node.offset for node in references(tree)] == [0, 8, 15, 19, 31]


def test_per_cent_of_something() -> None:
    tree = parse("2.5 % of rated_speed", UNITS)
    assert tree == PercentOf(fmpq(5, 2), "rated_speed")
    assert evaluate(tree, {"rated_speed": fmpq(400)}) == 10


def test_a_single_quantity_keeps_its_unit() -> None:
    tree = parse("-6 dB", UNITS)
    assert isinstance(tree, Number)
    assert tree.value == -6
    assert (literal_unit(tree) or UNITS.parse("1")).symbol == "dB"
    assert literal_unit(parse("2*lag", UNITS)) is None


# --- dimensions --------------------------------------------------------------------------------------------

_DIMENSIONS = {"lag": TIME, "stroke": LENGTH, "ratio": DIMENSIONLESS, "number": PLAIN}


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("3", PLAIN),
        ("pi*number**2", PLAIN),
        ("3 %", DIMENSIONLESS),
        ("lag + 5 ms", TIME),
        ("stroke/lag", LENGTH / TIME),
        ("2*lag", TIME),
        ("lag**-1", RATE),
        ("1/lag", RATE),
        ("ratio + 1", DIMENSIONLESS),
        ("-(lag)", TIME),
        ("stroke*(1 1/s) + 2 m/s", LENGTH / TIME),
        ("3 % of stroke", LENGTH),
        ("number*lag", TIME),
    ],
)
def test_dimensions(text: str, expected: object) -> None:
    assert dimension(parse(text, UNITS), _DIMENSIONS) == expected


@pytest.mark.parametrize("text", ["lag + stroke", "lag + 1", "1 - lag", "3 m + 2 s", "stroke - 5 %"])
def test_unlike_things_are_not_added(text: str) -> None:
    with pytest.raises(ExpressionError, match=r"cannot be (added to|subtracted from)"):
        dimension(parse(text, UNITS), _DIMENSIONS)


# --- errors ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "message", "offset"),
    [
        ("", "is wanted here", 0),
        ("   ", "is wanted here", 0),
        ("1 +", "at the end", 3),
        ("1 + * 2", "instead of `*`", 4),
        ("(1 + 2", "opened at character 1 is not closed", 0),
        ("1 + 2)", "closing bracket without an opening one", 5),
        ("1 2", "an operator is wanted before `2`", 2),
        ("lag gain", "an operator is wanted before `gain`", 4),
        ("85ms", "put a space between the number and its unit: `85 ms`", 2),
        ("8%", "put a space between the number and its unit: `8 %`", 1),
        ("1e", "put a space between", 1),
        ("3 sec", "did you mean `s`", 2),
        ("5 lag", "`lag` is not a listed unit.*if it is a name", 2),
        ("5 ms/lag", "runs to the next space", 2),
        ("(1 + 2) m", "the unit `m` has to follow a number directly", 8),
        ("lag^2", r"a power is written `\*\*`", 3),
        ("lag**2.5", "whole number", 5),
        ("lag**gain", "whole number", 5),
        ("lag**65", "whole number", 5),
        ("2**3**2", "a power of a power needs brackets", 4),
        ("6 dB + 1", "a value in dB stands alone", 0),
        ("2*6 dB", "a value in dB stands alone", 2),
        ("(6 dB)**2", "a value in dB stands alone", 1),
        ("lag; gain", "has no place in an expression", 3),
        ("lag\x00", r"U\+0000", 3),
        ("a.b.c", "has no place", 3),
        ("[1]", "has no place", 0),
        ("'a'", "has no place", 0),
        ("lag if gain else 1", "an operator is wanted before `if`", 4),
        ("lambda: 1", "has no place", 6),
        ("٣", "has no place", 0),
    ],
)
def test_errors_say_what_and_where(text: str, message: str, offset: int) -> None:
    with pytest.raises(ExpressionError, match=message) as caught:
        parse(text, UNITS)
    assert caught.value.offset == offset


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("lga", "there is no parameter `lga`; did you mean `lag`?"),
        ("1/0", "division by zero"),
        ("1/(lag - 85 ms)", "division by zero"),
        ("0**-1", "division by zero"),
        ("5000 dB", "more than 2000 dB"),
    ],
)
def test_errors_of_evaluation(text: str, message: str) -> None:
    with pytest.raises(ExpressionError) as caught:
        value(text)
    assert message in caught.value.message
