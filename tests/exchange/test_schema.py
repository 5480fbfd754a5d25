"""The schema of results: it names every field of a Review and nothing else, and every result is valid by it."""

from __future__ import annotations

import dataclasses
import json
import typing
from collections.abc import Callable, Iterator
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from specgate.exchange.json import write
from specgate.review import types
from specgate.review.types import Review, Unusable

TESTS = Path(__file__).resolve().parents[1]
SCHEMA: dict[str, Any] = json.loads(files("specgate.schemas").joinpath("results.schema.json").read_text())
Result = Callable[[Path], Review | Unusable]


def records() -> dict[str, type]:
    """The types of a Review by the names of the schema: `CriterionReview` is `criterion`."""
    found = {}
    for name, kind in vars(types).items():
        if dataclasses.is_dataclass(kind):
            stem = name.removesuffix("Review") or name
            found["".join(f"_{c.lower()}" if c.isupper() else c for c in stem).lstrip("_")] = typing.cast(type, kind)
    return found


def test_the_schema_is_one() -> None:
    Draft202012Validator.check_schema(SCHEMA)
    assert SCHEMA["$schema"] == "https://json-schema.org/draft/2020-12/schema"


def test_every_type_is_described_and_no_other() -> None:
    assert sorted(SCHEMA["$defs"]) == sorted(records())


@pytest.mark.parametrize("name", list(records()))
def test_every_field_is_described_and_no_other(name: str) -> None:
    described, fields = SCHEMA["$defs"][name], dataclasses.fields(records()[name])
    keys = {one.metadata.get("json", one.name): one for one in fields}
    assert sorted(described["properties"]) == sorted(keys)
    assert sorted(described["required"]) == sorted(key for key, one in keys.items() if not one.metadata.get("omit"))
    assert described["additionalProperties"] is False


def test_every_key_has_a_description() -> None:
    for name, described in SCHEMA["$defs"].items():
        assert described["description"].endswith((".", "1.")), name
        for key, one in described["properties"].items():
            assert len(one["description"]) > 5, (name, key)


def paths() -> Iterator[Path]:
    yield from sorted((TESTS / "rule_cases").glob("*/*.yaml"))
    yield from sorted((TESTS.parent / "example_projects").glob("*/rev_?"))
    yield TESTS / "examples" / "spec_format"
    yield from sorted((TESTS / "broken").glob("*.yaml"))[:12]


@pytest.mark.parametrize("path", list(paths()), ids=lambda path: f"{path.parent.name}/{path.name}")
def test_results_are_valid(path: Path, result: Result) -> None:
    tree = json.loads(write(result(path)))
    problems = [
        f"{list(one.absolute_path)}: {one.message[:200]}" for one in Draft202012Validator(SCHEMA).iter_errors(tree)
    ]
    assert problems == []


def test_a_wrong_result_is_not_valid(result: Result) -> None:
    tree = json.loads(write(result(TESTS / "examples" / "spec_format")))
    validator = Draft202012Validator(SCHEMA)
    assert validator.is_valid(tree)
    for wrong in ("maybe", None):
        assert not validator.is_valid({**tree, "gate": {"outcome": wrong, "reasons": []}})
    assert not validator.is_valid({**tree, "surplus": 1})
    assert not validator.is_valid({key: value for key, value in tree.items() if key != "findings"})
