"""Records: frozen dataclasses that are quick to define.

`@dataclass(frozen=True)` looks at every field of a class and compiles six functions for it. A run defines more than two
hundred classes before it reads its first file, makes objects of half of them, and asks few for their fields: that took
a third of all imports. A record is made ready when it is first used: its one own function, `__init__`, is written with
its first object, and `dataclass` itself only sees it where somebody asks for its fields. All other functions are shared
by all records. In everything else (fields, defaults, `replace`, what a type checker knows) it is a frozen dataclass,
all annotations of which are fields.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import MISSING, Field, FrozenInstanceError, dataclass, field, fields
from operator import attrgetter
from typing import Any, NoReturn, TypeVar, dataclass_transform

T = TypeVar("T")


@dataclass_transform(frozen_default=True, field_specifiers=(field,))
def record(kind: type[T]) -> type[T]:
    """Make a class whose annotations are its fields: set once, compared and hashed by value, shown by `repr`."""
    own = vars(kind)
    for name, function in _SHARED.items():
        if name not in own:
            setattr(kind, name, function)
    for name, complete in _LATER.items():
        if name not in own:
            setattr(kind, name, _Later(kind, name, complete))
    return kind


def names_of(kind: Any) -> tuple[str, ...]:
    """Return the names of the fields of a record, without `dataclass` being asked; of anything else none."""
    return tuple(kind.__parts__[0]) if hasattr(kind, "__parts__") else ()


class _Later:
    """An attribute of a class that is made, and takes its own place, when it is first asked for."""

    __slots__ = ("_complete", "_kind", "_name")

    def __init__(self, kind: type, name: str, complete: Callable[[Any], None]) -> None:
        self._kind, self._name, self._complete = kind, name, complete

    def __get__(self, instance: object, owner: type) -> Any:
        self._complete(self._kind)
        return getattr(owner if instance is None else instance, self._name)


def _make_callable(kind: Any) -> None:
    """Give a record its `__init__`, and what it is compared by."""
    parts, types = _parts(kind)
    kind.__parts__ = parts, types
    compared = [name for name, one in parts.items() if one.compare]
    kind.__key__ = attrgetter(*compared) if compared else staticmethod(_nothing)
    if isinstance(vars(kind)["__init__"], _Later):
        kind.__init__ = _initialiser(kind, parts, types)


def _make_dataclass(kind: Any) -> None:
    """Let `dataclass` see a record."""
    if isinstance(vars(kind)["__parts__"], _Later):
        _make_callable(kind)
    for name in _OF_DATACLASSES:
        if isinstance(vars(kind).get(name), _Later):
            delattr(kind, name)
    dataclass(init=False, repr=False, eq=False)(kind)


_OF_DATACLASSES = ("__dataclass_fields__", "__dataclass_params__", "__match_args__")
_LATER: dict[str, Callable[[Any], None]] = {
    **dict.fromkeys(("__init__", "__key__", "__parts__"), _make_callable),
    **dict.fromkeys(_OF_DATACLASSES, _make_dataclass),
}

_Parts = tuple[dict[str, "Field[Any]"], dict[str, str]]


def _parts(kind: Any) -> _Parts:
    """Return the fields of a record by name, those of its bases first, and their annotations."""
    parts: dict[str, Field[Any]] = {}
    types: dict[str, str] = {}
    for base in kind.__mro__[-1:0:-1]:
        inherited = getattr(base, "__parts__", None)
        if inherited is not None:
            parts.update(inherited[0])
            types.update(inherited[1])
    own = vars(kind)
    for name, annotation in own.get("__annotations__", {}).items():
        value = own.get(name, MISSING)
        parts[name] = value if isinstance(value, Field) else field(default=value)
        types[name] = annotation
    return parts, types


def _initialiser(kind: Any, parts: dict[str, Field[Any]], types: dict[str, str]) -> Callable[..., None]:
    """Return the function that takes the fields and sets them, written out so that Python itself checks each call."""
    given: dict[str, Any] = {"_put": object.__setattr__, "_missing": MISSING}
    parameters, lines = ["self"], ["pass"]
    for name, one in sorted(parts.items(), key=lambda part: part[1].kw_only is True):
        if one.kw_only is True and "*" not in parameters:
            parameters.append("*")
        value, default = name, ""
        if one.default is not MISSING:
            default = f"=_default_{name}"
            given[f"_default_{name}"] = one.default
        elif one.default_factory is not MISSING:
            default = "=_missing"
            value = f"_make_{name}() if {name} is _missing else {name}"
            given[f"_make_{name}"] = one.default_factory
        parameters.append(name + default)
        lines.append(f"_put(self, {name!r}, {value})")
    exec(f"def __init__({', '.join(parameters)}):\n " + "\n ".join(lines), given)
    function: Callable[..., None] = given["__init__"]
    function.__qualname__ = f"{kind.__qualname__}.__init__"
    function.__annotations__ = dict(types)
    return function


def _nothing(_: object) -> tuple[()]:
    return ()


def _refuse_to_set(self: object, name: str, value: object) -> NoReturn:
    raise FrozenInstanceError(f"cannot assign to field {name!r}")


def _refuse_to_delete(self: object, name: str) -> NoReturn:
    raise FrozenInstanceError(f"cannot delete field {name!r}")


def _equal(self: Any, other: Any) -> bool:
    return self.__key__(self) == self.__key__(other) if other.__class__ is self.__class__ else NotImplemented


def _hashed(self: Any) -> int:
    return hash(self.__key__(self))


def _shown(self: Any) -> str:
    values = (f"{one.name}={getattr(self, one.name)!r}" for one in fields(self) if one.repr)
    return f"{self.__class__.__qualname__}({', '.join(values)})"


_SHARED: dict[str, Callable[..., Any]] = {
    "__setattr__": _refuse_to_set,
    "__delattr__": _refuse_to_delete,
    "__eq__": _equal,
    "__hash__": _hashed,
    "__repr__": _shown,
}
