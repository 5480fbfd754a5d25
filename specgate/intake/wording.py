"""Errors of the schema validator in the words of the format: what was found, what was wanted, the nearest name."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from itertools import islice
from typing import Any

from specgate.intake.collect import MOST
from specgate.intake.nodes import Items, Node, Nothing, Number, Spot, Table, Text, Truth, shown
from specgate.intake.traps import cut_before, scalar_hint, split_by_comma, split_in_list
from specgate.terms.records import record

Path = tuple[str | int, ...]
Said = tuple[str, str, Spot]
"""Rule, message, and where."""

_TYPES = {
    "string": "a text",
    "number": "a number",
    "integer": "a whole number",
    "boolean": "true or false",
    "array": "a list",
    "object": "a table of keys",
}


Nearest = Callable[[str, Iterable[str]], "str | None"]
"""The known name that a word was most likely meant to be."""


@record
class Misshape:
    """One error of the schema validator with the node that it is about.

    keyword: what of the schema is violated; wanted: the value of that keyword; schema: what surrounds it.
    found: the plain value (the name itself where `of_name`, for a name of a key that is not allowed).
    node: what stands there, None where it could not be read; key: the key before it; around: what holds both.
    choice: of these keys one was wanted where an unknown one stands.
    conditional: whether this holds only because of something else (`then`, `else`, `dependentSchemas`).
    """

    keyword: str
    wanted: Any
    schema: Mapping[str, Any]
    found: Any
    path: Path
    node: Node | None
    key: Text | None
    around: Node | None
    conditional: bool
    of_name: bool
    nearest: Nearest
    choice: tuple[str, ...] = ()

    @property
    def unexpected(self) -> list[str]:
        """The keys that an `additionalProperties` error is about, in the order of the file, up to far too many."""
        return list(islice((key for key in self.found if key not in self.schema["properties"]), MOST + 1))

    @property
    def cut_off(self) -> list[str]:
        """The keys whose values a comma inside braces has cut, for an error about keys that are not allowed."""
        table = self.node
        if not isinstance(table, Table) or not (self.of_name or self.keyword == "additionalProperties"):
            return []
        strangers = [str(self.found)] if self.of_name else self.unexpected
        before = (cut_before(table, table.entries[key].key) for key in strangers)
        return [entry.key.value for entry in before if entry is not None]

    @property
    def missing(self) -> tuple[str, ...]:
        """The keys that would have put a `required`, `dependentRequired`, `oneOf` or `anyOf` error right."""
        if self.keyword == "required":
            return tuple(key for key in self.wanted if key not in self.found)
        if self.keyword == "dependentRequired":
            return tuple(dict.fromkeys(name for names in self.dependents.values() for name in names))
        if self.keyword in ("oneOf", "anyOf"):
            names = tuple(key for branch in self.wanted for key in branch["required"])
            return () if any(name in self.found for name in names) else names
        return ()

    @property
    def dependents(self) -> dict[str, list[str]]:
        """What is missing beside each key of a `dependentRequired` error."""
        given = {key: names for key, names in self.wanted.items() if key in self.found}
        return {key: [name for name in names if name not in self.found] for key, names in given.items()}


_ABOUT_KEYS = ("required", "oneOf", "anyOf", "not", "dependentRequired", "minProperties")
"""Keywords that are about a table as a whole: said at its key."""


def worded(error: Misshape) -> Iterator[Said]:
    """Give what there is to say about one error; nothing about what could not be read."""
    rule = error.schema.get("x-rule", "schema-violation")
    node, key = error.node, error.key
    if node is None:
        return
    if error.keyword == "additionalProperties" and isinstance(node, Table):
        for name in error.unexpected:
            yield rule, _unexpected(name, error, node), node.entries[name].key.spot
    elif error.keyword == "required":
        for name in error.missing:
            yield rule, _required(name, error), key.spot if key is not None else node.spot
    elif error.of_name and isinstance(node, Table):
        yield rule, _name(error), node.entries[str(error.found)].key.spot
    else:
        speak = _WORDS.get(error.keyword, _other)
        yield rule, speak(error, node), _spot(error, node)


def _spot(error: Misshape, node: Node) -> Spot:
    """Return where an error is said: at the key that it is about, or at the value."""
    named = error.schema.get("x-key")
    if named is not None and isinstance(error.around, Table) and named in error.around.entries:
        key = error.around.entries[named].key
        return key.spot if named != str(error.path[-1]) else node.spot
    return error.key.spot if error.keyword in _ABOUT_KEYS and error.key is not None else node.spot


def _unexpected(name: str, error: Misshape, table: Table) -> str:
    comma = split_by_comma(table, table.entries[name].key)
    if comma is not None:
        return f"`{name}` is no key: {comma}"
    known = error.schema["properties"]
    close = error.nearest(name, known)
    where = f"`{_cut(name)}` is not a key of {error.schema.get('title', 'this table')}"
    if close is not None:
        return f"{where}: did you mean `{close}`?"
    if error.choice:
        return f"{where}: exactly one of {_listed([f'`{one}`' for one in error.choice], 'or')} is wanted"
    return f"{where}, which has {_listed(list(known), 'and')}"


def _name(error: Misshape) -> str:
    """Say what is wrong with the name of a key."""
    found = str(error.found)
    comma = split_by_comma(error.node, error.node.entries[found].key) if isinstance(error.node, Table) else None
    if comma is not None:
        return f"`{_cut(found)}` is no name: {comma}"
    said = error.schema.get("x-say")
    if said is not None:
        return str(said).replace("{found}", _cut(found))
    if error.keyword == "enum":
        return _nearest_of(found, error)
    return f"`{_cut(found)}` is not {error.schema.get('x-wanted', 'a name that can be used here')}"


def _type(error: Misshape, node: Node) -> str:
    wanted = _wanted(error)
    message = f"{wanted} is wanted here, found {shown(node)}"
    hint = _type_hint(error, node)
    return f"{message}: {hint}" if hint else message


def _type_hint(error: Misshape, node: Node) -> str | None:
    types = error.wanted if isinstance(error.wanted, list) else [error.wanted]
    match node:
        case Text(value=value):
            return scalar_hint(value) or ("write a list, `[…]`" if types == ["array"] else None)
        case Number() | Truth() if "string" in types:
            return "put it in quotes if it is meant as text"
        case Nothing():
            return "fill it in, or leave the key out"
        case Table(braces=True) if "string" in types:
            return "a text that begins with { needs quotes"
        case Table(braces=False) if types == ["array"]:
            return "begin each entry of the list with `- `"
        case Items() if types == ["string"]:
            return "one text only, without brackets"
    return None


def _wanted(error: Misshape) -> str:
    if "x-wanted" in error.schema:
        return str(error.schema["x-wanted"])
    types = error.schema.get("type", [])
    return _listed([_TYPES[name] for name in ([types] if isinstance(types, str) else types)], "or")


def _enum(error: Misshape, node: Node) -> str:
    if "x-say" in error.schema:
        return str(error.schema["x-say"]).replace("{found}", _cut(str(error.found)))
    if not isinstance(node, Text):
        return f"{_listed(error.wanted, 'or')} is wanted here, found {shown(node)}"
    return _nearest_of(node.value, error)


def _nearest_of(found: str, error: Misshape) -> str:
    known: Sequence[str] = error.wanted
    close = error.nearest(found, known)
    if close is not None:
        return f"`{_cut(found)}` is not known here: did you mean `{close}`?"
    wanted = f"{error.schema['x-wanted']}: " if "x-wanted" in error.schema else ""
    return f"`{_cut(found)}` is not known here: wanted is {wanted}{_listed(known, 'or')}"


def _required(name: str, error: Misshape) -> str:
    if "x-say" in error.schema:
        return str(error.schema["x-say"]).replace("{missing}", name)
    text = error.schema.get("properties", {}).get(name, {}).get("description", "")
    about = f" ({_first_sentence(text)})" if text else ""
    return f"`{name}` is missing{_in(error)}{about}"


def _one_of(error: Misshape, node: Node) -> str:
    names = [branch["required"][0] for branch in error.wanted]
    given = [name for name in names if name in error.found]
    wanted = _listed([f"`{name}`" for name in names], "or")
    if len(given) > 1:
        return (
            f"{_listed([f'`{name}`' for name in given], 'and')} exclude each other: exactly one of {wanted} is wanted"
        )
    forms = [f"`{branch['required'][0]}`{_titled(branch)}" for branch in error.wanted]
    return f"exactly one of {_listed(forms, 'or')} is wanted{_in(error)}, found none of them"


def _any_of(error: Misshape, node: Node) -> str:
    names = [f"`{branch['required'][0]}`" for branch in error.wanted]
    return f"at least one of {_listed(names, 'or')} is wanted{_in(error)}"


def _dependent(error: Misshape, node: Node) -> str:
    missing = error.missing[0]
    needing = [f"`{key}`" for key, names in error.dependents.items() if missing in names]
    return f"{_listed(needing, 'and')} {'needs' if len(needing) == 1 else 'need'} `{missing}` beside it"


def _wanted_here(error: Misshape, node: Node) -> str:
    return f"{_wanted(error)} is wanted here, found {shown(node)}"


def _too_many(error: Misshape, node: Node) -> str:
    message = _wanted_here(error, node)
    comma = split_in_list(node.nodes) if isinstance(node, Items) else None
    return f"{message}: {comma}" if comma is not None else message


def _empty(error: Misshape, node: Node) -> str:
    return f"at least one entry is wanted here, found {shown(node)}"


def _repeated(error: Misshape, node: Node) -> str:
    return "an entry of this list is written twice"


def _other(error: Misshape, node: Node) -> str:
    said = error.schema.get("x-say")
    if said is not None:
        return str(said).replace("{found}", _cut(str(error.found)))
    return f"this is not what the format allows here, found {shown(node)}"


_WORDS: dict[str, Callable[[Misshape, Node], str]] = {
    "type": _type,
    "enum": _enum,
    "const": _other,
    "oneOf": _one_of,
    "anyOf": _any_of,
    "dependentRequired": _dependent,
    "format": _wanted_here,
    "minItems": _wanted_here,
    "maxItems": _too_many,
    "minProperties": _empty,
    "pattern": _wanted_here,
    "minimum": _wanted_here,
    "maximum": _wanted_here,
    "uniqueItems": _repeated,
}


def _in(error: Misshape) -> str:
    title = error.schema.get("title")
    return f" in {title}" if title else ""


def _titled(branch: Mapping[str, Any]) -> str:
    return f" ({branch['title']})" if "title" in branch else ""


def _first_sentence(text: str) -> str:
    return text.split(". ")[0].rstrip(".")


def _listed(words: Sequence[object], joint: str) -> str:
    texts = [str(word) for word in words]
    return texts[0] if len(texts) == 1 else f"{', '.join(texts[:-1])} {joint} {texts[-1]}"


def _cut(text: str) -> str:
    return text if len(text) <= 60 else text[:59] + "…"
