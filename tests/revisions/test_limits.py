"""How limits are compared: kind by kind, in whatever units, exactly on and 1e-6 off the same value."""

from __future__ import annotations

from typing import Any

import pytest

from specgate.review.types import Amount, LimitReview
from specgate.revisions.amounts import order
from specgate.revisions.limits import compared


def amount(exact: str, unit: str) -> Amount:
    return Amount(0.0, unit, exact)


def limit(**parts: Any) -> LimitReview:
    amounts = {key: amount(*value.split()) if isinstance(value, str) else value for key, value in parts.items()}
    between = amounts.get("between")
    if between is not None:
        amounts["between"] = tuple(amount(*end.split()) for end in between)
    return LimitReview(**amounts)


S = {"at_most": "2 s"}
CASES: list[tuple[dict[str, Any], dict[str, Any], str]] = [
    (S, {"at_most": "1 s"}, "tightened"),
    (S, {"at_most": "2000001/1000000 s"}, "loosened"),
    (S, {"at_most": "1999999/1000000 s"}, "tightened"),
    (S, {"at_most": "2000 ms"}, "same"),
    (S, {"at_most": "2001 ms"}, "loosened"),
    (S, {"at_most": "2 m"}, "changed"),
    (S, {"at_least": "2 s"}, "shifted"),
    (S, {"at_least": "1 s"}, "shifted"),
    (S, {"between": ("1 s", "2 s")}, "tightened"),
    (S, {"between": ("1 s", "3 s")}, "shifted"),
    ({"at_least": "2 s"}, {"at_least": "3 s"}, "tightened"),
    ({"at_least": "2 s"}, {"at_least": "1 s"}, "loosened"),
    ({"at_least": "2 s"}, {"between": ("2 s", "9 s")}, "tightened"),
    ({"between": ("1 s", "2 s")}, {"between": ("1 s", "3 s")}, "loosened"),
    ({"between": ("1 s", "3 s")}, {"between": ("2 s", "4 s")}, "shifted"),
    ({"within": "1 m", "of": "5 m"}, {"within": "2 m", "of": "5 m"}, "loosened"),
    ({"within": "1 m", "of": "5 m"}, {"within": "1 m", "of": "6 m"}, "shifted"),
    ({"within": "1 m", "of": "5 m"}, {"between": ("4 m", "6 m")}, "same"),
    ({"equals": 1}, {"equals": 1}, "same"),
    ({"equals": 1}, {"equals": 2}, "shifted"),
    ({"equals": 1}, {"at_least": "1 1"}, "loosened"),
    ({"equals": True}, {"equals": False}, "changed"),
    ({"equals": True}, {"equals": 1}, "changed"),
    ({"at_least": "60 rpm"}, {"at_least": "62831853/10000000 rad/s"}, "loosened"),
    ({"at_least": "60 rpm"}, {"at_least": "62831854/10000000 rad/s"}, "tightened"),
    ({"at_least": "20 dB"}, {"at_least": "10 1"}, "same"),
    ({"at_least": "6 dB"}, {"at_least": "2 1"}, "tightened"),
    ({"at_least": "6 dB"}, {"at_least": "19952624/10000000 1"}, "tightened"),
    ({"at_least": "6 dB"}, {"at_least": "19952623/10000000 1"}, "loosened"),
    ({"at_most": "3 count"}, {"at_most": "2 count"}, "tightened"),
    ({"at_most": "3 count"}, {"at_most": "3 s"}, "changed"),
    ({"at_most": "10 %"}, {"at_most": "1/10 1"}, "same"),
    (
        {"at_most": Amount(10, "%", "10", "10 % of change")},
        {"at_most": Amount(10, "points", "10", "10 points")},
        "changed",
    ),
]
_OPPOSITE = {"tightened": "loosened", "loosened": "tightened"}


@pytest.mark.parametrize(("old", "new", "moved"), CASES)
def test_how_a_limit_was_moved(old: dict[str, Any], new: dict[str, Any], moved: str) -> None:
    assert compared(limit(**old), limit(**new)) == moved
    assert compared(limit(**new), limit(**old)) == _OPPOSITE.get(moved, moved)


@pytest.mark.parametrize("text", ["", "x", "1/0", "nan", "inf"])
def test_what_is_no_number_compares_with_nothing(text: str) -> None:
    assert order(amount(text, "s"), amount("1", "s")) is None
    assert order(Amount(None, "s"), amount("1", "s")) is None


def test_what_is_unlimited_lies_above_all() -> None:
    unlimited = Amount(None, "dB", infinite=True)
    assert order(unlimited, amount("1000", "dB")) == 1
    assert order(amount("1000", "dB"), unlimited) == -1
    assert order(unlimited, unlimited) == 0
