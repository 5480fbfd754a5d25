"""How fields of a review are written out."""

from __future__ import annotations

from dataclasses import field
from typing import Any


def omitted(key: str | None = None) -> Any:
    """Return a field that is left out of the result where it is None; `key`: what it is called there."""
    return field(default=None, metadata={"omit": True} if key is None else {"omit": True, "json": key})
