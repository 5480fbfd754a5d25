"""The shape of a file: checked against the JSON Schema, which is the only statement of it.

Keywords of our own in the schema, which editors pass over: `x-wanted` (what is wanted, in words), `x-say` (the whole
message; `{found}` and `{missing}` are filled in), `x-key` (the key at which it is said), `x-rule` (its slug).
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import replace
from decimal import Decimal
from functools import cache
from importlib.resources import files
from itertools import islice
from typing import TYPE_CHECKING, Any

from specgate.intake.collect import MOST, Collector
from specgate.intake.fits import NotUnderstood, fits
from specgate.intake.nodes import Broken, Items, Node, Number, Table, Text, plain
from specgate.intake.wording import Misshape, Nearest, Path, worded

if TYPE_CHECKING:
    from jsonschema.exceptions import ValidationError

    Validator = Any

_ABOUT = {"requirements": "requirement", "loops": "loop", "subsystems": "subsystem"}


@cache
def schema() -> Mapping[str, Any]:
    """Return the project schema; its numbers are exact, as those of the files are."""
    text = (files("specgate.schemas") / "specgate.schema.json").read_text(encoding="utf-8")
    loaded: Mapping[str, Any] = json.loads(text, parse_float=Decimal)
    return loaded


@cache
def _validator(part: str | None) -> Validator:
    # imported here because it costs 60 ms, which a run need not pay in which nothing is wrong
    from jsonschema import Draft202012Validator, FormatChecker

    whole = schema()
    wanted = whole if part is None else whole["$defs"][part]
    return Draft202012Validator(_written_out(wanted, whole["$defs"], {}), format_checker=FormatChecker(["date"]))


def _written_out(node: Any, definitions: Mapping[str, Any], known: dict[str, Any]) -> Any:
    """Return a schema with what its `$ref`s lead to in their place: looking them up is a third of the work."""
    if isinstance(node, list):
        return [_written_out(item, definitions, known) for item in node]
    if not isinstance(node, dict):
        return node
    beside = {
        key: _written_out(value, definitions, known) for key, value in node.items() if key not in ("$ref", "$defs")
    }
    if "$ref" not in node:
        return beside
    name = node["$ref"].removeprefix("#/$defs/")
    if name not in known:
        known[name] = _written_out(definitions[name], definitions, known)
    return {**known[name], **beside}


def _fits(value: Any, part: str | None) -> bool:
    """Whether a value is told to fit; where it is not, the validator says why, if there is a reason."""
    whole = schema()
    try:
        return fits(value, whole if part is None else whole["$defs"][part], whole["$defs"])
    except NotUnderstood:
        return False


def check(root: Node, collector: Collector, part: str | None = None) -> None:
    """Report everything about a tree that the schema (or one of its `$defs`) does not allow."""
    if isinstance(root, Broken):
        return
    value = plain(root)
    if _fits(value, part):
        return
    errors = islice(_validator(part).iter_errors(value), 2 * MOST)
    for error in _telling([_misshape(root, error, collector.nearest) for error in errors]):
        _report(error, collector)


def _misshape(root: Node, error: ValidationError, near: Nearest) -> Misshape:
    path = tuple(error.absolute_path)
    node, key, around = _locate(root, path)
    passed = set(error.absolute_schema_path)
    return Misshape(
        keyword=str(error.validator),
        wanted=error.validator_value,
        schema=error.schema if isinstance(error.schema, dict) else {},
        found=error.instance,
        path=path,
        node=node,
        key=key,
        around=around,
        conditional=not passed.isdisjoint({"then", "else", "dependentSchemas"}),
        of_name="propertyNames" in passed,
        nearest=near,
    )


def _locate(root: Node, path: Path) -> tuple[Node | None, Text | None, Node | None]:
    """Return the node at a path, its key and what holds it; the node is None where something was not readable."""
    node, key = root, None
    around: Node | None = None
    for step in path:
        around = node
        if isinstance(node, Table) and isinstance(step, str):
            entry = node.entries[step]
            node, key = entry.value, entry.key
        elif isinstance(node, Items) and isinstance(step, int):
            node, key = node.nodes[step], None
    return (None if isinstance(node, Broken) else node), key, around


def _telling(errors: list[Misshape]) -> Iterable[Misshape]:
    """Leave out what only follows from another error: a rule for a kind that is unknown, a key that is misspelt."""
    # on what is no table, `required` holds, so that all alternatives do: that it is no table is said by `type`
    errors = [error for error in errors if not _of_no_table(error)]
    cut = {(*error.path, key) for error in errors for key in error.cut_off}
    cut |= {(*error.path, str(error.found)) for error in errors if error.of_name and error.cut_off}
    errors = [error for error in errors if error.path not in cut]
    certain = [error for error in errors if not error.conditional]
    unsettled = {e.path[:-1] for e in certain if e.keyword == "enum" and e.path}
    unsettled |= {e.path for e in certain if e.keyword == "oneOf"}
    wrong = {error.path for error in certain}
    misspelt: dict[Path, set[str | None]] = {}
    meant: dict[Path, set[str | None]] = {}
    for error in errors:
        names, close = meant.setdefault(error.path, set()), misspelt.setdefault(error.path, set())
        if error.keyword == "additionalProperties":
            close.update(error.nearest(key, error.schema["properties"]) for key in error.unexpected)
            names.update(error.unexpected, close)
        if error.keyword == "dependentRequired":
            names.update(error.missing)
    for error in _with_choices(errors):
        if error.conditional and not unsettled.isdisjoint((error.path, error.path[:-1])):
            continue
        if error.conditional and _repeats(error, meant[error.path], wrong):
            continue
        told = misspelt if error.keyword == "dependentRequired" else meant
        if told[error.path].isdisjoint(error.missing):
            yield error


def _of_no_table(error: Misshape) -> bool:
    return error.keyword in ("oneOf", "not") and not error.of_name and not isinstance(error.found, dict)


def _with_choices(errors: list[Misshape]) -> Iterator[Misshape]:
    """Give the errors, a choice of which none was made together with the one unknown key that stands in its place."""
    choices = {error.path: error for error in errors if error.keyword == "oneOf" and error.missing}
    strangers = {
        error.path: error
        for error in errors
        if error.keyword == "additionalProperties"
        and error.path in choices
        and len(error.unexpected) == 1
        and not error.cut_off
        and error.nearest(error.unexpected[0], error.schema["properties"]) is None
    }
    for error in errors:
        if error.path not in strangers or error not in (choices[error.path], strangers[error.path]):
            yield error
        elif error is strangers[error.path]:
            yield replace(error, choice=choices[error.path].missing)


def _repeats(error: Misshape, meant: set[str | None], wrong: set[Path]) -> bool:
    """Whether a conditional error is about a key or a value that is reported without any condition."""
    if error.of_name:
        return error.found in meant
    return error.path in wrong and error.keyword in ("type", "enum", "const")


def _harmless(error: Misshape) -> bool:
    """Whether others can rely on the shape all the same: a key too many that stands for none that is missing."""
    if error.keyword != "additionalProperties" or error.cut_off:
        return False
    return not any(error.nearest(key, error.schema["properties"]) for key in error.unexpected)


def _report(error: Misshape, collector: Collector) -> None:
    about = {}
    if len(error.path) > 1 and error.path[0] in _ABOUT:
        about[_ABOUT[str(error.path[0])]] = str(error.path[1])
    if not _harmless(error):
        collector.misshapen.update(error.path[:length] for length in range(1, len(error.path) + 1))
    if isinstance(error.node, Text | Number):
        collector.unreadable.add(error.node.spot)
    if isinstance(error.node, Table):
        collector.unreadable.update(error.node.entries[key].value.spot for key in error.cut_off)
    for rule, message, spot in worded(error):
        collector.error(rule, message, spot.place, **about)
