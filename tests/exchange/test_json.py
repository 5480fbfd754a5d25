"""The law of the machine-readable result: what is written reads back as the same Review, for any Review."""

from __future__ import annotations

import dataclasses
import json
import types
import typing
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.exchange.json import read, write
from specgate.review.types import Review, Unusable

TESTS = Path(__file__).resolve().parents[1]
PROJECTS = [
    *sorted((TESTS / "rule_cases").glob("*/*.yaml")),
    *sorted((TESTS.parent / "example_projects").glob("*/rev_?")),
    TESTS / "examples" / "spec_format",
]
BROKEN = sorted((TESTS / "broken").glob("*.yaml"))[:12]
Result = Callable[[Path], Review | Unusable]


@pytest.mark.parametrize("path", [*PROJECTS, *BROKEN], ids=lambda path: f"{path.parent.name}/{path.name}")
def test_results_of_projects_read_back(path: Path, result: Result) -> None:
    found = result(path)
    text = write(found)
    assert read(text) == found
    assert write(read(text)) == text


# --- any Review at all: values made from the annotations of the types ------------------------------------------

texts = st.text(st.characters(codec="utf-8"), max_size=8)
plain = st.recursive(
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False) | texts,
    lambda inner: st.lists(inner, max_size=2) | st.dictionaries(texts, inner, max_size=2),
    max_leaves=4,
)
LEAVES: dict[Any, st.SearchStrategy[Any]] = {
    float: st.floats(allow_nan=False, allow_infinity=False),
    int: st.integers(-(10**20), 10**20),
    bool: st.booleans(),
    str: texts,
    Any: plain,
    type(None): st.none(),
}


def values(kind: Any) -> st.SearchStrategy[Any]:
    origin, inner = typing.get_origin(kind), typing.get_args(kind)
    if dataclasses.is_dataclass(kind):
        hints = typing.get_type_hints(kind)
        return st.builds(
            typing.cast(type, kind), **{one.name: values(hints[one.name]) for one in dataclasses.fields(kind)}
        )
    if origin in (typing.Union, types.UnionType):
        return st.one_of([values(one) for one in inner])
    if origin is tuple:
        if len(inner) == 2 and inner[1] is not Ellipsis:
            return st.tuples(*(values(one) for one in inner))
        return st.lists(values(inner[0]), max_size=2).map(tuple)
    if origin is Mapping:
        return st.dictionaries(texts, values(inner[1]), max_size=2)
    return LEAVES[kind]


@settings(max_examples=60, deadline=None)
@given(values(Review) | values(Unusable))
def test_any_result_reads_back(found: Review | Unusable) -> None:
    assert read(write(found)) == found


# --- form -----------------------------------------------------------------------------------------------------


def test_plain_json_without_numbers_that_json_has_not(result: Result) -> None:
    text = write(result(TESTS / "examples" / "spec_format"))
    json.loads(text, parse_constant=lambda name: pytest.fail(f"{name} is no JSON"))
    assert text.endswith("}\n")


def test_lists_of_numbers_stand_on_one_line(result: Result) -> None:
    lines = write(result(TESTS / "examples" / "spec_format")).splitlines()
    assert any(line.strip().startswith('"time": [0.0, ') for line in lines)
    assert '          "measures": [' in lines


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[]", "the key `format` is missing"),
        ('{"format": 1, "tool": 3}', "result.tool: an object is wanted"),
        ('{"format": 1, "surplus": 3}', "the key `surplus` is not one of this format"),
        ('{"format": 1, "inputs": {}}', "result.inputs: a list is wanted"),
        ('{"format": 1}', "missing 4 required positional arguments"),
    ],
)
def test_what_is_no_result_is_refused_with_its_place(text: str, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        read(text)
