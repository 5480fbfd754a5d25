"""Results of another version of the format, read as far as both versions know the same things.

A key that this version does not know is passed over; where a key is missing that this version always writes, or holds
something of another kind, the field is empty and is remembered as unknown. `alike` empties it in another result too, so
that comparing the two finds no difference in what one of them does not say.
"""

from __future__ import annotations

import dataclasses
import json
import types
import typing
from collections.abc import Collection, Mapping
from typing import Any, TypeVar, cast

from specgate.exchange.json import Field, field_table
from specgate.review.types import Review, Unusable
from specgate.terms.records import record

T = TypeVar("T")
Unknown = frozenset[tuple[str, str]]
"""Fields of the format, as the name of the record and its key."""


@record
class Foreign:
    """A result of another format. unknown: fields that it lacks; surplus: keys that this version does not know."""

    review: Review | Unusable
    format: object
    unknown: Unknown
    surplus: Unknown


def read_known(text: str) -> Foreign:
    """Read what this version knows of a result, or of that in a baseline. Raises ValueError where there is none."""
    tree = json.loads(text)
    if isinstance(tree, dict) and "baseline" in tree and "result" in tree:
        tree = tree["result"]
    if not isinstance(tree, dict) or "format" not in tree or not isinstance(tree.get("gate"), dict):
        raise ValueError("this is not a result of specgate: the keys `format` and `gate` are missing")
    reading = _Reading()
    built = reading.build(Review if "project" in tree else Unusable, tree)
    return Foreign(built, tree["format"], frozenset(reading.unknown), frozenset(reading.surplus))


class _Reading:
    def __init__(self) -> None:
        self.unknown: set[tuple[str, str]] = set()
        self.surplus: set[tuple[str, str]] = set()

    def build(self, kind: Any, value: Any) -> Any:
        """Build a value of the annotated type `kind`. Raises TypeError where the value is of another kind."""
        origin, inner = typing.get_origin(kind), typing.get_args(kind)
        if dataclasses.is_dataclass(kind):
            return self._record(cast(type, kind), value)
        if origin in (typing.Union, types.UnionType):
            return self._one_of(inner, value)
        if origin is tuple:
            kinds = inner if len(inner) == 2 and inner[1] is not Ellipsis else inner[:1] * len(_of(list, value))
            return tuple(self.build(one, part) for one, part in zip(kinds, _of(list, value), strict=True))
        if origin is Mapping:
            return {key: self.build(inner[1], part) for key, part in _of(dict, value).items()}
        if kind is not Any and not isinstance(value, (int, float) if kind is float else kind):
            raise TypeError(value)
        return value

    def _record(self, kind: type, value: Any) -> Any:
        known = {one.key: one for one in field_table(kind)}
        self.surplus |= {(kind.__name__, key) for key in _of(dict, value) if key not in known}
        return kind(**{one.name: self._field(kind, one, value) for one in known.values()})

    def _field(self, kind: type, one: Field, value: Mapping[str, Any]) -> Any:
        if one.key in value:
            try:
                return self.build(one.type, value[one.key])
            except (TypeError, ValueError):
                self.unknown.add((kind.__name__, one.key))
        elif not one.omit:
            self.unknown.add((kind.__name__, one.key))
        return empty(one.type)

    def _one_of(self, kinds: tuple[Any, ...], value: Any) -> Any:
        if value is None and type(None) in kinds:
            return None
        keys = value.keys() if isinstance(value, dict) else set()
        for kind in sorted(kinds, key=lambda kind: not _knows(kind, keys)):
            try:
                return self.build(kind, value)
            except (TypeError, ValueError):
                continue
        raise TypeError(value)


def _knows(kind: Any, keys: Collection[str]) -> bool:
    """Tell whether a record of a union has a field for every key of a value."""
    return dataclasses.is_dataclass(kind) and set(keys) <= {one.key for one in field_table(cast(type, kind))}


def _of(kind: type[T], value: Any) -> T:
    if not isinstance(value, kind):
        raise TypeError(value)
    return value


def empty(kind: Any) -> Any:
    """Return the emptiest value of an annotated type."""
    origin, inner = typing.get_origin(kind), typing.get_args(kind)
    if kind is Any or kind is type(None) or type(None) in inner:
        return None
    if dataclasses.is_dataclass(kind):
        return cast(type, kind)(**{one.name: empty(one.type) for one in field_table(cast(type, kind))})
    if origin is tuple:
        return ()
    if origin is Mapping:
        return {}
    return empty(inner[0]) if inner else kind()


def alike(result: T, unknown: Unknown) -> T:
    """Return a result with the fields emptied that another one does not know."""
    return cast(T, _alike(result, unknown)) if unknown else result


def _alike(value: Any, unknown: Unknown) -> Any:
    if isinstance(value, tuple):
        return tuple(_alike(part, unknown) for part in value)
    if isinstance(value, Mapping):
        return {key: _alike(part, unknown) for key, part in value.items()}
    if not dataclasses.is_dataclass(value) or isinstance(value, type):
        return value
    kind = type(value)
    emptied = {
        one.name: empty(one.type) if (kind.__name__, one.key) in unknown else _alike(getattr(value, one.name), unknown)
        for one in field_table(kind)
    }
    return dataclasses.replace(value, **emptied)
