"""The plain yes or no on a schema, against `jsonschema`: on every file of the tests, and on chance changes of them."""

from __future__ import annotations

from decimal import Decimal
from pathlib import Path
from random import Random
from typing import Any

import pytest
from jsonschema import Draft202012Validator, FormatChecker

from specgate.intake.collect import Collector
from specgate.intake.fits import NotUnderstood, fits
from specgate.intake.nodes import Broken, Origin, plain
from specgate.intake.reader import Allowance, read
from specgate.intake.shape import schema

TESTS = Path(__file__).parents[1]
SCHEMA = schema()
VALIDATOR = Draft202012Validator(SCHEMA, format_checker=FormatChecker(["date"]))
OTHERS = (
    "",
    "x",
    "2026-11-02",
    "2026-13-02",
    "2 %",
    0,
    1,
    -1,
    25,
    Decimal("1.5"),
    True,
    False,
    None,
    [],
    {},
    ["a", "a"],
)


def trees() -> list[Any]:
    """Return everything in the tests that is read as a tree."""
    paths = sorted(path for part in ("broken", "rule_cases", "intake/whole") for path in (TESTS / part).rglob("*.yaml"))
    nodes = [read(path.read_bytes(), Origin(path.name), Allowance(), Collector()) for path in paths]
    return [plain(node) for node in nodes if not isinstance(node, Broken)]


def places(value: Any, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    """Return where something stands inside a value."""
    inner = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    return [path, *(place for key, part in inner for place in places(part, (*path, key)))]


def changed(value: Any, path: tuple[Any, ...], random: Random) -> Any:
    """Return a value with something else at a place: another value, a key less, a key more."""
    if path:
        made = dict(value) if isinstance(value, dict) else list(value)
        made[path[0]] = changed(value[path[0]], path[1:], random)
        return made
    if isinstance(value, dict) and value and random.random() < 0.7:
        key = random.choice(sorted(value, key=str))
        if random.random() < 0.5:
            return {name: part for name, part in value.items() if name != key}
        return {**value, random.choice(("unheard_of", f"{key}s", "title")): value[key]}
    return random.choice(OTHERS)


@pytest.mark.parametrize("seed", range(3))
def test_it_says_what_jsonschema_says(seed: int) -> None:
    random = Random(seed)
    known = trees()
    assert len(known) > 100
    told = {True: 0, False: 0}
    for _ in range(70):
        value = random.choice(known)
        for _ in range(random.randrange(3)):
            value = changed(value, random.choice(places(value)), random)
        answer = fits(value, SCHEMA, SCHEMA["$defs"])
        assert answer is VALIDATOR.is_valid(value)
        told[answer] += 1
    assert min(told.values()) > 5


@pytest.mark.parametrize(
    ("value", "wanted"),
    [
        (1, {"const": True}),
        (True, {"enum": [1]}),
        (True, {"type": "integer"}),
        (False, {"minimum": 0}),
        (3, {"not": {}}),
    ],
)
def test_truth_is_no_number(value: Any, wanted: dict[str, Any]) -> None:
    assert fits(value, wanted, {}) is Draft202012Validator(wanted).is_valid(value)


@pytest.mark.parametrize(
    "wanted", [{"contains": {}}, {"$ref": "elsewhere.json"}, {"format": "uri"}, {"const": {}}, {"prefixItems": []}]
)
def test_what_it_does_not_know_it_leaves(wanted: dict[str, Any]) -> None:
    with pytest.raises(NotUnderstood):
        fits("a", wanted, {})
