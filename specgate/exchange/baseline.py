"""A baseline written as JSON and read back."""

from __future__ import annotations

import json
from typing import cast

from specgate.exchange.json import built, written
from specgate.review.types.baseline import Frozen


def write(frozen: Frozen) -> str:
    """Write a baseline as JSON text that ends with a line break."""
    return written(frozen)


def read(text: str) -> Frozen:
    """Read a baseline back. Raises ValueError where the text holds none."""
    tree = json.loads(text)
    if not isinstance(tree, dict) or "baseline" not in tree:
        raise ValueError("this is not a baseline of specgate: the key `baseline` is missing")
    return cast(Frozen, built(Frozen, tree, "baseline"))
