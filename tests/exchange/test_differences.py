"""Differences as JSON: they read back, they are valid by their schema, and the schema names every field."""

from __future__ import annotations

import dataclasses
import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from specgate.cli import schema
from specgate.exchange.differences import read, write
from specgate.review.types import Review, ToolReview, Unusable
from specgate.revisions import types
from specgate.revisions.compare import differences
from specgate.revisions.types import Differences

ROOT = Path(__file__).resolve().parents[2]
SCHEMA: dict[str, Any] = json.loads(schema.text("differences"))
OWN = {
    "".join(f"_{c.lower()}" if c.isupper() else c for c in name).lstrip("_"): kind
    for name, kind in vars(types).items()
    if dataclasses.is_dataclass(kind) and kind.__module__ == types.__name__
}
Result = Callable[[Path], Review | Unusable]


def found(result: Result, example: str, old: str, new: str) -> Differences:
    sides = [result(ROOT / "example_projects" / example / revision) for revision in (old, new)]
    assert isinstance(sides[0], Review)
    assert isinstance(sides[1], Review)
    return differences(sides[0], sides[1], ToolReview("specgate", "0"))


@pytest.mark.parametrize("example", ["pilot_fermenter", "survey_airship"])
@pytest.mark.parametrize(("old", "new"), [("rev_a", "rev_b"), ("rev_b", "rev_a"), ("rev_a", "rev_a")])
def test_differences_read_back_and_are_valid(result: Result, example: str, old: str, new: str) -> None:
    here = found(result, example, old, new)
    text = write(here)
    assert read(text) == here
    assert sorted(error.message for error in Draft202012Validator(SCHEMA).iter_errors(json.loads(text))) == []


@pytest.mark.parametrize("name", OWN)
def test_every_field_is_described_and_no_other(name: str) -> None:
    described, fields = SCHEMA["$defs"][name], dataclasses.fields(OWN[name])
    assert sorted(described["properties"]) == sorted(one.name for one in fields)
    assert sorted(described["required"]) == sorted(one.name for one in fields if not one.metadata.get("omit"))
    assert described["additionalProperties"] is False


def test_the_schema_is_one_and_needs_no_other() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    assert set(re.findall(r'"\$ref": "#/\$defs/(\w+)"', json.dumps(SCHEMA))) == SCHEMA["$defs"].keys()


@pytest.mark.parametrize("text", ["[]", "{", '{"format": 1}', '{"surplus": 1}'])
def test_what_is_none_is_refused(text: str) -> None:
    with pytest.raises(ValueError):
        read(text)
