"""Whether a value fits a JSON Schema: what a run asks of every file, and nearly always finds.

`jsonschema` says what is wrong with a value, and it alone does; but to import it and to ask it takes a tenth of a run
in which nothing is wrong. Here is the plain yes or no, for the keywords that our schema uses and in the same meaning
(draft 2020-12); anything else is refused, so that nothing is ever taken for understood.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Mapping
from datetime import date
from decimal import Decimal
from functools import cache
from typing import Any

Schema = Mapping[str, Any] | bool
Definitions = Mapping[str, Schema]


class NotUnderstood(Exception):
    """A keyword, or a use of one, that is left to `jsonschema`."""


def fits(value: Any, schema: Schema, definitions: Definitions) -> bool:
    """Return whether a value of plain Python (dict, list, str, int, Decimal, bool, None) fits.

    definitions: what `#/$defs/…` leads to. Raises NotUnderstood.
    """
    if isinstance(schema, bool):
        return schema
    for keyword, wanted in schema.items():
        rule = _RULES.get(keyword)
        if rule is None:
            if keyword not in _NOTES and not keyword.startswith("x-"):
                raise NotUnderstood(keyword)
        elif not rule(value, wanted, schema, definitions):
            return False
    return True


Rule = Callable[[Any, Any, Mapping[str, Any], Definitions], bool]

_NOTES = frozenset(("$defs", "$id", "$schema", "title", "description", "examples", "default", "then", "else"))
"""Keywords that ask nothing by themselves; `then` and `else` belong to `if`."""


def _is_number(value: Any) -> bool:
    return isinstance(value, int | Decimal) and not isinstance(value, bool)


_TYPES: Mapping[str, Callable[[Any], bool]] = {
    "object": lambda value: isinstance(value, dict),
    "array": lambda value: isinstance(value, list),
    "string": lambda value: isinstance(value, str),
    "boolean": lambda value: isinstance(value, bool),
    "null": lambda value: value is None,
    "integer": lambda value: isinstance(value, int) and not isinstance(value, bool),
    "number": _is_number,
}


def _type(value: Any, wanted: Any, *_: Any) -> bool:
    return _TYPES[wanted](value) if isinstance(wanted, str) else any(_TYPES[kind](value) for kind in wanted)


def _each(values: Iterable[Any], schema: Schema, definitions: Definitions) -> bool:
    """Whether all of many values fit; a loop, because `all` of a generator takes twice the time."""
    for value in values:  # noqa: SIM110
        if not fits(value, schema, definitions):
            return False
    return True


def _all_of(value: Any, wanted: Any, _: Any, definitions: Definitions) -> bool:
    for part in wanted:  # noqa: SIM110
        if not fits(value, part, definitions):
            return False
    return True


def _any_of(value: Any, wanted: Any, _: Any, definitions: Definitions) -> bool:
    for part in wanted:  # noqa: SIM110
        if fits(value, part, definitions):
            return True
    return False


def _same(value: Any, wanted: Any) -> bool:
    """Whether two values are equal in JSON: true is not 1."""
    if isinstance(wanted, dict | list):
        raise NotUnderstood("const")
    return isinstance(value, bool) is isinstance(wanted, bool) and bool(value == wanted)


def _properties(value: Any, wanted: Any, _: Any, definitions: Definitions) -> bool:
    if not isinstance(value, dict):
        return True
    for name, part in value.items():  # noqa: SIM110
        if name in wanted and not fits(part, wanted[name], definitions):
            return False
    return True


def _additional(value: Any, wanted: Any, schema: Mapping[str, Any], definitions: Definitions) -> bool:
    if not isinstance(value, dict):
        return True
    if "patternProperties" in schema:
        raise NotUnderstood("patternProperties")
    known = schema.get("properties", {})
    if wanted is False:
        return bool(value.keys() <= known.keys())
    return _each([part for name, part in value.items() if name not in known], wanted, definitions)


def _dependent(value: Any, wanted: Any, _: Any, definitions: Definitions) -> bool:
    if not isinstance(value, dict):
        return True
    return all(fits(value, part, definitions) for name, part in wanted.items() if name in value)


def _dependent_required(value: Any, wanted: Any, *_: Any) -> bool:
    if not isinstance(value, dict):
        return True
    return all(other in value for name, others in wanted.items() if name in value for other in others)


def _unique(value: Any, wanted: Any, *_: Any) -> bool:
    if not (wanted and isinstance(value, list)):
        return True
    if not all(isinstance(item, str) for item in value):
        raise NotUnderstood("uniqueItems")
    return len(set(value)) == len(value)


def _if(value: Any, wanted: Any, schema: Mapping[str, Any], definitions: Definitions) -> bool:
    return fits(value, schema.get("then" if fits(value, wanted, definitions) else "else", True), definitions)


_DEFINED = "#/$defs/"


def _reference(value: Any, wanted: str, _: Any, definitions: Definitions) -> bool:
    if not wanted.startswith(_DEFINED):
        raise NotUnderstood("$ref")
    return fits(value, definitions[wanted[len(_DEFINED) :]], definitions)


@cache
def _pattern(text: str) -> re.Pattern[str]:
    return re.compile(text)


def _format(value: Any, wanted: str, *_: Any) -> bool:
    if wanted != "date":
        raise NotUnderstood("format")
    if not isinstance(value, str):
        return True
    try:
        return bool(_pattern(r"^\d{4}-\d{2}-\d{2}$").fullmatch(value) and value.isascii() and date.fromisoformat(value))
    except ValueError:
        return False


_RULES: Mapping[str, Rule] = {
    "$ref": _reference,
    "type": _type,
    "enum": lambda value, wanted, *_: any(_same(value, one) for one in wanted),
    "const": lambda value, wanted, *_: _same(value, wanted),
    "format": _format,
    "pattern": lambda value, wanted, *_: not isinstance(value, str) or _pattern(wanted).search(value) is not None,
    "minimum": lambda value, wanted, *_: not _is_number(value) or value >= wanted,
    "maximum": lambda value, wanted, *_: not _is_number(value) or value <= wanted,
    "required": lambda value, wanted, *_: not isinstance(value, dict) or all(name in value for name in wanted),
    "properties": _properties,
    "additionalProperties": _additional,
    "propertyNames": lambda value, wanted, _, definitions: (
        not isinstance(value, dict) or _each(value, wanted, definitions)
    ),
    "minProperties": lambda value, wanted, *_: not isinstance(value, dict) or len(value) >= wanted,
    "maxProperties": lambda value, wanted, *_: not isinstance(value, dict) or len(value) <= wanted,
    "dependentRequired": _dependent_required,
    "dependentSchemas": _dependent,
    "items": lambda value, wanted, _, definitions: not isinstance(value, list) or _each(value, wanted, definitions),
    "minItems": lambda value, wanted, *_: not isinstance(value, list) or len(value) >= wanted,
    "maxItems": lambda value, wanted, *_: not isinstance(value, list) or len(value) <= wanted,
    "uniqueItems": _unique,
    "if": _if,
    "not": lambda value, wanted, _, definitions: not fits(value, wanted, definitions),
    "allOf": _all_of,
    "anyOf": _any_of,
    "oneOf": lambda value, wanted, _, definitions: sum(fits(value, part, definitions) for part in wanted) == 1,
}
