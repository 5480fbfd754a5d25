"""Records: frozen dataclasses that are quick to define.

`@dataclass(frozen=True)` writes and compiles six functions for every class. A run defines two hundred classes before
it reads its first file, which took a fifth of its time. A record has one function of its own, `__init__`; the others
are shared by all records. In everything else (fields, defaults, `replace`, what a type checker knows) it is a frozen
dataclass.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import MISSING, FrozenInstanceError, dataclass, field, fields
from typing import Any, NoReturn, TypeVar, cast, dataclass_transform

T = TypeVar("T")


@dataclass_transform(frozen_default=True, field_specifiers=(field,))
def record(kind: type[T]) -> type[T]:
    """Make a class whose annotations are its fields: set once, compared and hashed by value, shown by `repr`."""
    made: Any = dataclass(init=False, repr=False, eq=False)(kind)
    made.__compared__ = tuple(one.name for one in fields(made) if one.compare)
    own = vars(kind)
    for name, function in {"__init__": _initialiser(made), **_SHARED}.items():
        if name not in own:
            setattr(made, name, function)
    return cast("type[T]", made)


def _initialiser(kind: Any) -> Callable[..., None]:
    """Return the function that takes the fields and sets them, written out so that Python itself checks each call."""
    given: dict[str, Any] = {"_put": object.__setattr__, "_missing": MISSING}
    parameters, lines = ["self"], ["pass"]
    for one in sorted(fields(kind), key=lambda one: one.kw_only is True):
        if one.kw_only and "*" not in parameters:
            parameters.append("*")
        value, default = one.name, ""
        if one.default is not MISSING:
            default = f"=_default_{one.name}"
            given[f"_default_{one.name}"] = one.default
        elif one.default_factory is not MISSING:
            default = "=_missing"
            value = f"_make_{one.name}() if {one.name} is _missing else {one.name}"
            given[f"_make_{one.name}"] = one.default_factory
        parameters.append(one.name + default)
        lines.append(f"_put(self, {one.name!r}, {value})")
    exec(f"def __init__({', '.join(parameters)}):\n " + "\n ".join(lines), given)
    function: Callable[..., None] = given["__init__"]
    function.__qualname__ = f"{kind.__qualname__}.__init__"
    function.__annotations__ = {one.name: one.type for one in fields(kind)}
    return function


def _refuse_to_set(self: object, name: str, value: object) -> NoReturn:
    raise FrozenInstanceError(f"cannot assign to field {name!r}")


def _refuse_to_delete(self: object, name: str) -> NoReturn:
    raise FrozenInstanceError(f"cannot delete field {name!r}")


def _equal(self: Any, other: Any) -> bool:
    return _key(self) == _key(other) if other.__class__ is self.__class__ else NotImplemented


def _hashed(self: Any) -> int:
    return hash(_key(self))


def _key(self: Any) -> tuple[object, ...]:
    return tuple([getattr(self, name) for name in self.__compared__])


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
