"""Declared values in words, for the two columns of a change."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from specgate.review.types import Amount, LimitReview


def said(value: Any) -> str | None:
    """Return a declared value as one line of text; None where there is none."""
    if value is None or value == ():
        return None
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, Mapping):
        return "; ".join(f"{key}: {said(part)}" for key, part in value.items()) or None
    if isinstance(value, tuple | list):
        return ", ".join(str(said(part)) for part in value)
    return str(value)


def amount(value: Amount) -> str:
    """Return an amount as it was written, else as its number and unit."""
    if value.as_written is not None:
        return value.as_written
    number = "unlimited" if value.infinite else "none" if value.value is None else f"{value.value:.12g}"
    return number if value.unit in ("1", "") else f"{number} {value.unit}"


def limit(value: LimitReview) -> str:
    """Return a limit as it would be written."""
    if value.at_most is not None:
        return f"at most {amount(value.at_most)}"
    if value.at_least is not None:
        return f"at least {amount(value.at_least)}"
    if value.between is not None:
        return f"between {amount(value.between[0])} and {amount(value.between[1])}"
    if value.within is not None and value.of is not None:
        return f"within {amount(value.within)} of {amount(value.of)}"
    return f"equals {said(value.equals)}"
