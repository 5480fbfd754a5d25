"""Text from a specification, made harmless before it is shown anywhere.

Markup is escaped where markup is written. Here go the characters that act instead of being seen: control characters
drive a terminal, direction marks reorder what follows, and a character without a glyph makes a PDF invalid. Each is
replaced by its code point (`[U+202E]`), so that two different texts never look the same.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Mapping
from dataclasses import fields, is_dataclass, replace
from functools import cache
from operator import is_not
from typing import Any, TypeVar, cast

from specgate.terms.records import names_of

T = TypeVar("T")
Shown = Callable[[str], bool]
"""Whether a character that does not act can be drawn."""
_ACTS = {"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"}
_BREAK = re.compile(r"[^\S ]")


def acts(character: str) -> bool:
    """Tell whether a character controls the output instead of being seen."""
    return unicodedata.category(character) in _ACTS and character not in "\n\u00ad"


def visible(text: str, shown: Shown | None = None) -> str:
    """Return `text` on one line, with every character that acts, or that `shown` denies, named by its code point."""
    joined = " ".join(text.split()) if _BREAK.search(text) else text
    # nothing that is printable acts: almost every text is left as it is, without a look at its characters
    if joined.isprintable() and (shown is None or joined.isascii() or all(map(shown, joined))):
        return joined
    return "".join(c if not acts(c) and (shown is None or shown(c)) else f"[U+{ord(c):04X}]" for c in joined)


def cleaned(tree: T, shown: Shown | None = None) -> T:
    """Return a tree of dataclasses, mappings and tuples with every text in it made visible; itself if all was."""
    return cast(T, _cleaned(tree, shown))


def _cleaned(tree: Any, shown: Shown | None) -> Any:
    if isinstance(tree, str):
        return visible(tree, shown)
    if tree is None or isinstance(tree, (float, int)):
        return tree
    if isinstance(tree, (tuple, list)):
        if not tree or isinstance(tree[0], float):
            return tree
        parts = tuple([_cleaned(item, shown) for item in tree])
        return parts if any(map(is_not, parts, tree)) else tree
    names = _names(tree.__class__)
    if names:
        changed = {}
        for name in names:
            part = getattr(tree, name)
            if part is not None and (after := _cleaned(part, shown)) is not part:
                changed[name] = after
        return replace(tree, **changed) if changed else tree
    if isinstance(tree, Mapping):
        pairs = [(_cleaned(key, shown), _cleaned(value, shown)) for key, value in tree.items()]
        same = all(key is old and value is part for (key, value), (old, part) in zip(pairs, tree.items(), strict=True))
        return tree if same else dict(pairs)
    return tree


@cache
def _names(kind: type) -> tuple[str, ...]:
    """Return the fields of a record or a dataclass, of anything else none."""
    return names_of(kind) or (tuple(item.name for item in fields(kind)) if is_dataclass(kind) else ())
