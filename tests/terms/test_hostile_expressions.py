"""Nothing that is written in a file runs, hangs or fills the memory."""

from __future__ import annotations

import contextlib
from collections.abc import Callable

import pytest
from flint import fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.terms.dimensions import Dimension
from specgate.terms.expressions import MOST_BITS, PLAIN, ExpressionError, dimension, evaluate, parse
from specgate.terms.units import UnitTable

UNITS = UnitTable.standard()
MOST_CALLS = 20_000
"""Function calls of the largest expression, times four."""

Work = Callable[[Callable[[], object]], int]

HOSTILE = [
    "9**9**9**9",
    "((9**64)**64)**64",
    "(((((10**64)**64)**64)**64)**64)",
    "1e999999999",
    "1e-999999999",
    "1e400*" * 60 + "1e400",
    "9" * 900,
    "(" * 900,
    "(" * 450 + "1" + ")" * 450,
    "-" * 900 + "1",
    "1+" * 499 + "1",
    "1*" * 2000 + "1",
    "a" * 1000,
    "." * 900,
    "1 " + "m*" * 400 + "m",
    "1 " + "(" * 500,
    "1 m/(" + "m/(" * 250,
    "1 % of " + "a" * 900,
    "2**" + "9" * 900,
    "2**-" + "9" * 900,
    "2**9999999999999999999999999",
    "1e" + "9" * 900,
    "__import__('os').system('true')",
    "().__class__.__bases__[0].__subclasses__()",
    "open('/etc/passwd').read()",
    "exec('1')",
    "`ls`",
    "${HOME}",
    "{{7*7}}",
    "!!python/object:os.system",
    "lambda x: x",
    "x := 3",
    "a[0]",
    "'a' * 10**9",
    "\x00",
    "\ud800",
    "\u202e1+1",
    "1\u00a0ms",
    "𝟏𝟐",
    "pi" * 300,
    "0x1F",
    "1_000",
    "inf",
    "nan + 1",
    "1 dB" + " + 1 dB" * 50,
]


def _read(text: str) -> fmpq | None:
    try:
        return evaluate(parse(text, UNITS), {"x": fmpq(3), "a": fmpq(2)})
    except ExpressionError as problem:
        refused = problem
    assert refused.message
    assert 0 <= refused.offset <= len(text)
    return None


@pytest.mark.parametrize("text", HOSTILE, ids=range(len(HOSTILE)))
def test_hostile_text_is_refused_at_once(text: str, work: Work) -> None:
    assert work(lambda: _read(text)) < MOST_CALLS
    assert _read(text) is None


@pytest.mark.parametrize(
    "text",
    ["1" + "+1" * 99, "(" * 39 + "1" + ")" * 39, "1" + "/3" * 99, "(1e400)**6", "+" * 39 + "x"],
)
def test_the_largest_expressions_that_are_allowed_are_little_work(text: str, work: Work) -> None:
    assert work(lambda: _read(text)) < MOST_CALLS
    assert _read(text) is not None


@given(st.text(max_size=120))
def test_any_text_is_a_value_or_an_error(work: Work, text: str) -> None:
    assert work(lambda: _read(text)) < MOST_CALLS


_pieces = st.sampled_from(
    [
        "(",
        ")",
        "+",
        "-",
        "*",
        "/",
        "**",
        " ",
        "1",
        "9",
        "e",
        ".",
        "x",
        "pi",
        "ms",
        " m",
        " dB",
        "%",
        " of ",
        "64",
        "1e300",
    ]
)


@given(st.lists(_pieces, max_size=60).map("".join))
def test_any_heap_of_tokens_is_a_value_or_an_error_of_bounded_size(work: Work, text: str) -> None:
    assert work(lambda: _read(text)) < MOST_CALLS
    found = _read(text)
    if found is not None:
        assert max(int(found.p).bit_length(), int(found.q).bit_length()) <= MOST_BITS


@given(st.lists(_pieces, max_size=40).map("".join))
def test_the_dimension_of_whatever_can_be_read_is_told_or_refused(text: str) -> None:
    with contextlib.suppress(ExpressionError):
        inferred = dimension(parse(text, UNITS), {"x": UNITS.parse("m").dimension})
        assert inferred is PLAIN or isinstance(inferred, Dimension)
