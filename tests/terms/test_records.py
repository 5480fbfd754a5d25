"""Records behave as frozen dataclasses do; each law is checked on both."""

from __future__ import annotations

import copy
import dataclasses
import inspect
import pickle
from collections.abc import Callable
from dataclasses import FrozenInstanceError, dataclass, field
from typing import Any

import pytest

from specgate.terms.records import record


@record
class Rope:
    """A rope."""

    name: str
    length: float = 2.0
    knots: list[int] = field(default_factory=list)
    place: int = field(default=0, compare=False, kw_only=True)


@record
class Cable(Rope):
    """A rope with a core."""

    core: str = "steel"
    colour: str = field(default="grey", repr=False)


@record
class Nothing:
    """No field at all."""


@record
class Alone:
    """No field that is compared."""

    place: int = field(default=0, compare=False)


def _dataclass_like(kind: type, base: type = object) -> type:
    """Return the frozen dataclass of the same fields."""
    own = {name: kind.__annotations__[name] for name in vars(kind).get("__annotations__", {})}
    made = {one.name: one for one in dataclasses.fields(kind)}
    copies = {
        name: field(
            default=made[name].default,
            default_factory=made[name].default_factory,
            compare=made[name].compare,
            repr=made[name].repr,
            kw_only=made[name].kw_only,
        )
        for name in own
    }
    return dataclass(frozen=True)(type(kind.__name__, (base,), {"__annotations__": own, **copies}))


PLAIN_ROPE = _dataclass_like(Rope)
PLAIN_CABLE = _dataclass_like(Cable, PLAIN_ROPE)
PAIRS = [(Rope, PLAIN_ROPE), (Cable, PLAIN_CABLE)]


@pytest.mark.parametrize(("kind", "plain"), PAIRS)
@pytest.mark.parametrize(
    "make",
    [
        lambda kind: kind("a"),
        lambda kind: kind("a", 3.0, [1]),
        lambda kind: kind(name="a", knots=[2], place=7),
        lambda kind: dataclasses.replace(kind("a", knots=[3]), length=9.0),
    ],
)
def test_made_and_shown_as_a_frozen_dataclass_is(kind: type, plain: type, make: Callable[[type], Any]) -> None:
    assert dataclasses.asdict(make(kind)) == dataclasses.asdict(make(plain))
    assert repr(make(kind)) == repr(make(plain))


@pytest.mark.parametrize(("kind", "plain"), PAIRS)
def test_the_call_is_that_of_a_frozen_dataclass(kind: type, plain: type) -> None:
    ours, theirs = inspect.signature(kind).parameters, inspect.signature(plain).parameters
    assert [(one.name, one.kind) for one in ours.values()] == [(one.name, one.kind) for one in theirs.values()]
    assert {name for name, one in ours.items() if one.default is one.empty} == {"name"}
    assert kind.__init__.__annotations__["name"] == "str"  # type: ignore[misc]
    assert kind.__match_args__ == plain.__match_args__  # type: ignore[attr-defined]


@pytest.mark.parametrize(
    "call", [lambda kind: kind(), lambda kind: kind("a", rope="b"), lambda kind: kind("a", 1.0, [], "steel", "red", 5)]
)
def test_a_wrong_call_is_refused_in_the_same_words(call: Callable[[type], Any]) -> None:
    messages = []
    for kind in (Cable, PLAIN_CABLE):
        with pytest.raises(TypeError) as refused:
            call(kind)
        messages.append(str(refused.value))
    assert messages[0] == messages[1].replace("_dataclass_like.<locals>.", "")


def test_every_record_has_a_list_of_its_own() -> None:
    assert Rope("a").knots is not Rope("a").knots


def test_equal_by_value_and_class() -> None:
    assert Rope("a", 1.0) == Rope("a", 1.0)
    assert Rope("a", 1.0) == Rope("a", 1.0, place=5)
    assert Rope("a", 1.0) != Rope("a", 1.5)
    assert Cable("a", 1.0) != Rope("a", 1.0)
    assert Rope("a") != "a"
    assert Nothing() == Nothing()
    assert Alone(1) == Alone(2)


def test_hashed_by_what_is_compared() -> None:
    @record
    class Key:
        name: str
        at: int = field(default=0, compare=False)

    assert {Key("a", 1): "found"}[Key("a", 2)] == "found"
    assert hash(Alone(1)) == hash(Alone(2))
    with pytest.raises(TypeError, match="unhashable"):
        hash(Rope("a"))


def test_nothing_is_set_or_deleted() -> None:
    for rope in (Rope("a"), PLAIN_ROPE("a")):
        with pytest.raises(FrozenInstanceError, match="cannot assign to field 'name'"):
            rope.name = "b"
        with pytest.raises(FrozenInstanceError, match="cannot delete field 'name'"):
            del rope.name
    with pytest.raises(FrozenInstanceError):
        Rope("a").weight = 3  # type: ignore[attr-defined]


def test_copied_and_pickled() -> None:
    cable = Cable("a", knots=[1], place=3)
    for again in (copy.copy(cable), copy.deepcopy(cable), pickle.loads(pickle.dumps(cable))):
        assert again == cable
        assert again.place == 3


def test_what_a_class_says_itself_stays() -> None:
    @record
    class Own:
        name: str

        def __repr__(self) -> str:
            return f"own {self.name}"

        def __eq__(self, other: object) -> bool:
            return isinstance(other, Own)

        def __hash__(self) -> int:
            return 1

    assert repr(Own("a")) == "own a"
    assert Own("a") == Own("b")
    assert hash(Own("a")) == 1
