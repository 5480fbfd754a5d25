"""The machine-readable result: a Review written as JSON and read back, nothing added, nothing lost.

`read(write(review)) == review` holds for every Review. Keys are the field names of `specgate.review.types`; what is
None and marked `omit` there is left out. Lists of plain values stand on one line, so that a difference between two
results is read line by line.
"""

from __future__ import annotations

import dataclasses
import json
import types
import typing
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Any

from specgate.review.types import Review, Unusable

_WIDTH = 120


def write(review: Review | Unusable) -> str:
    """Write a result as JSON text that ends with a line break."""
    return written(review)


def written(record: object) -> str:
    """Write any record as JSON text that ends with a line break."""
    return "".join(_lines(_plain(record), "")) + "\n"


def read(text: str) -> Review | Unusable:
    """Read a result back. Raises ValueError where the text is no result of the format."""
    tree = json.loads(text)
    if not isinstance(tree, dict) or "format" not in tree:
        raise ValueError("this is not a result of specgate: the key `format` is missing")
    return typing.cast("Review | Unusable", built(Review if "project" in tree else Unusable, tree, "result"))


def built(kind: type, tree: object, where: str) -> Any:
    """Build a record of the type `kind` from plain values. Raises ValueError, with the place below `where`."""
    return _build(kind, tree, where)


# --- from types to plain values ----------------------------------------------------------------------------


@dataclasses.dataclass(frozen=True)
class Field:
    """A field of a record as it is written: its key, and when it is left out."""

    name: str
    key: str
    omit: bool
    said_for: str | None
    type: Any


@cache
def field_table(kind: type) -> tuple[Field, ...]:
    """Return the fields of a type in writing order: what it adds to its base comes first."""
    hints = typing.get_type_hints(kind)
    base = kind.__mro__[1]
    inherited = {one.name for one in dataclasses.fields(base)} if dataclasses.is_dataclass(base) else set()
    every = sorted(dataclasses.fields(kind), key=lambda one: one.name in inherited)
    return tuple(
        Field(
            one.name,
            one.metadata.get("json", one.name),
            one.metadata.get("omit", False),
            one.metadata.get("said_for"),
            hints[one.name],
        )
        for one in every
    )


def _plain(value: Any) -> Any:
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        pairs = ((one, getattr(value, one.name)) for one in field_table(type(value)))
        return {one.key: _plain(part) for one, part in pairs if part is not None or _said(one, value)}
    if isinstance(value, Mapping):
        return {str(key): _plain(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(part) for part in value]
    return value


def _said(field: Field, record: Any) -> bool:
    """Whether a key stands in the text although there is nothing to say under it."""
    return not field.omit or (field.said_for is not None and field.said_for == getattr(record, "measure", None))


# --- from plain values to text -----------------------------------------------------------------------------


def _lines(value: Any, indent: str) -> Iterator[str]:
    """Yield the text of a plain value; `indent` is that of the line on which it begins."""
    if isinstance(value, dict) and value:
        entries: list[tuple[str, Any]] = [(f"{_encode(key)}: ", part) for key, part in value.items()]
        yield from _block("{", "}", entries, indent)
    elif isinstance(value, list) and not all(_is_scalar(part) for part in value):
        yield from _block("[", "]", [("", part) for part in value], indent)
    else:
        yield _encode(value)


def _block(opening: str, closing: str, entries: list[tuple[str, Any]], indent: str) -> Iterator[str]:
    within = indent + "  "
    short = _short(opening, closing, entries, indent)
    if short is not None:
        yield short
        return
    yield opening
    for number, (label, part) in enumerate(entries):
        yield f"{',' if number else ''}\n{within}{label}"
        yield from _lines(part, within)
    yield f"\n{indent}{closing}"


def _short(opening: str, closing: str, entries: list[tuple[str, Any]], indent: str) -> str | None:
    """Return a block of plain values on one line, where it fits."""
    if not all(_is_scalar(part) for _, part in entries):
        return None
    text = opening + ", ".join(label + _encode(part) for label, part in entries) + closing
    return text if len(indent) + len(text) <= _WIDTH else None


def _is_scalar(value: Any) -> bool:
    return not isinstance(value, dict | list) or not value


_encode = json.JSONEncoder(ensure_ascii=False, allow_nan=False).encode


# --- from plain values to types ----------------------------------------------------------------------------


def _build(kind: Any, value: Any, where: str) -> Any:
    """Build a value of the annotated type `kind` from plain values."""
    origin, inner = typing.get_origin(kind), typing.get_args(kind)
    if dataclasses.is_dataclass(kind):
        return _record(typing.cast(type, kind), value, where)
    if origin in (typing.Union, types.UnionType):
        return _one_of(inner, value, where)
    if origin is tuple:
        return _sequence(inner, value, where)
    if origin is Mapping:
        if not isinstance(value, dict):
            raise ValueError(f"{where}: an object is wanted")
        return {key: _build(inner[1], part, f"{where}.{key}") for key, part in value.items()}
    return value


def _record(kind: type, value: Any, where: str) -> Any:
    if not isinstance(value, dict):
        raise ValueError(f"{where}: an object is wanted")
    known = {one.key: one for one in field_table(kind)}
    unknown = [key for key in value if key not in known]
    if unknown:
        raise ValueError(f"{where}: the key `{unknown[0]}` is not one of this format")
    try:
        return kind(**{known[key].name: _build(known[key].type, part, f"{where}.{key}") for key, part in value.items()})
    except TypeError as problem:
        raise ValueError(f"{where}: {problem}") from None


def _one_of(kinds: tuple[Any, ...], value: Any, where: str) -> Any:
    """Take the only alternative that is not plain; of two records the first that knows every key of the value."""
    if value is None:
        return None
    shaped = [one for one in kinds if dataclasses.is_dataclass(one) or typing.get_origin(one) in (tuple, Mapping)]
    if len(shaped) > 1 and isinstance(value, dict):
        fitting = (
            one for one in shaped if value.keys() <= {field.key for field in field_table(typing.cast(type, one))}
        )
        return _build(next(fitting, shaped[0]), value, where)
    return _build(shaped[0], value, where) if shaped else value


def _sequence(inner: tuple[Any, ...], value: Any, where: str) -> tuple[Any, ...]:
    if not isinstance(value, list):
        raise ValueError(f"{where}: a list is wanted")
    kind = inner[0]
    return tuple(_build(kind, part, f"{where}[{number}]") for number, part in enumerate(value))
