"""Text from a specification, made harmless before it is shown anywhere.

Markup is escaped where markup is written. Here go the characters that act instead of being seen: control characters
drive a terminal, direction marks reorder what follows, and a character without a glyph makes a PDF invalid. Each is
replaced by its code point (`[U+202E]`), so that two different texts never look the same.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Callable, Mapping
from dataclasses import fields, is_dataclass, replace
from typing import Any, TypeVar, cast

T = TypeVar("T")
_ACTS = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}


def acts(character: str) -> bool:
    """Tell whether a character controls the output instead of being seen."""
    return unicodedata.category(character) in _ACTS and character not in "\n\u00ad"


def visible(text: str, shown: Callable[[str], bool] = lambda character: True) -> str:
    """Return `text` on one line, with every character that acts, or that `shown` denies, named by its code point."""
    joined = " ".join(text.split()) if any(c.isspace() and c != " " for c in text) else text
    if joined.isascii() and joined.isprintable():
        return joined
    return "".join(c if not acts(c) and shown(c) else f"[U+{ord(c):04X}]" for c in joined)


def cleaned(tree: T, shown: Callable[[str], bool] = lambda character: True) -> T:
    """Return a copy of a tree of dataclasses, mappings and tuples with every text in it made visible."""
    return cast(T, _cleaned(tree, shown))


def _cleaned(tree: Any, shown: Callable[[str], bool]) -> Any:
    if isinstance(tree, str):
        return visible(tree, shown)
    if isinstance(tree, Mapping):
        return {_cleaned(key, shown): _cleaned(value, shown) for key, value in tree.items()}
    if isinstance(tree, tuple | list):
        if tree and isinstance(tree[0], float):
            return tree
        return tuple(_cleaned(item, shown) for item in tree)
    if is_dataclass(tree) and not isinstance(tree, type):
        changed = {}
        for item in fields(tree):
            before = getattr(tree, item.name)
            after = _cleaned(before, shown)
            if after is not before:
                changed[item.name] = after
        return replace(tree, **changed) if changed else tree
    return tree
