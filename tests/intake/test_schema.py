"""The JSON Schema: valid, described on every key, its lists made from the tables."""

from __future__ import annotations

import json
from collections.abc import Iterator
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from specgate.intake import lists
from specgate.intake.collect import Collector
from specgate.intake.merge import KNOWN, NAMED
from specgate.intake.nodes import Origin, plain
from specgate.intake.reader import Allowance, read

TEXT = (files("specgate.schemas") / "specgate.schema.json").read_text(encoding="utf-8")
SCHEMA = json.loads(TEXT)
WHOLE = Path(__file__).parent / "whole"


def schemas(node: Any, path: str = "") -> Iterator[tuple[str, dict[str, Any]]]:
    """Give every schema inside the schema, with its path."""
    if isinstance(node, dict):
        yield path, node
        for key, value in node.items():
            yield from schemas(value, f"{path}/{key}")
    elif isinstance(node, list):
        for index, value in enumerate(node):
            yield from schemas(value, f"{path}/{index}")


def test_it_is_a_valid_schema_of_2020_12() -> None:
    assert SCHEMA["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    Draft202012Validator.check_schema(SCHEMA)


def test_its_lists_are_those_of_the_tables() -> None:
    assert lists.rewritten(TEXT) == TEXT, "run `python -m specgate.intake.lists`"


def stated() -> Iterator[tuple[str, dict[str, Any]]]:
    """Give the schemas that state a shape, without those that only are conditions or consequences."""
    for path, schema in schemas(SCHEMA):
        if not {"if", "then", "else", "not", "measure_arguments"} & set(path.split("/")):
            yield path, schema


def test_every_key_is_described_in_a_sentence() -> None:
    keys = [
        (f"{path}/{name}", value)
        for path, schema in stated()
        if schema.get("type") in ("object", ["string", "object"], ["string", "number", "object"])
        for name, value in schema.get("properties", {}).items()
    ]
    assert len(keys) > 150
    assert [path for path, value in keys if not value.get("description", "").endswith(".")] == []


def test_every_table_refuses_unknown_keys() -> None:
    tables = [(path, schema) for path, schema in stated() if schema.get("type") == "object"]
    assert [path for path, schema in tables if "additionalProperties" not in schema] == ["/$defs/whole_project"]


def test_no_alternatives_that_would_hide_what_is_wrong() -> None:
    for path, schema in schemas(SCHEMA):
        for keyword in ("oneOf", "anyOf"):
            branches = schema.get(keyword, [])
            assert all(set(branch) <= {"required", "title", "maxProperties"} for branch in branches), path


def test_the_sections_are_those_that_files_are_merged_by() -> None:
    assert set(SCHEMA["properties"]) == KNOWN
    for name in NAMED:
        assert SCHEMA["properties"][name]["type"] == "object"


def test_every_reference_leads_somewhere() -> None:
    used = {schema["$ref"] for _, schema in schemas(SCHEMA) if isinstance(schema.get("$ref"), str)}
    assert {name.removeprefix("#/$defs/") for name in used} == set(SCHEMA["$defs"]) - {"whole_project"}


def keys_in(node: Any) -> Iterator[str]:
    if isinstance(node, dict):
        for key, value in node.items():
            yield str(key)
            yield from keys_in(value)
    elif isinstance(node, list):
        for value in node:
            yield from keys_in(value)


def test_the_project_with_every_key_has_every_key() -> None:
    trees = [read(path.read_bytes(), Origin(path.name), Allowance(), Collector()) for path in WHOLE.rglob("*.yaml")]
    written = {key for tree in trees for key in keys_in(plain(tree))}
    assert {name for _, schema in stated() for name in schema.get("properties", {})} - written == {"$schema"}


@pytest.mark.parametrize("name", ["measure", "approximation"])
def test_names_are_offered_for_completion(name: str) -> None:
    assert len(SCHEMA["$defs"][name]["enum"]) > 8
