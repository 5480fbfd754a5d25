"""Results of the examples, to compare."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review

ROOT = Path(__file__).resolve().parents[2]


@cache
def _review(path: Path) -> Review:
    loaded = load(path)
    assert not isinstance(loaded, Problems)
    return review(loaded)


@pytest.fixture(scope="session")
def example() -> Callable[[str], Review]:
    """Return a function from a path below the repository to the Review of the project there, each computed once."""
    return lambda path: _review(ROOT / path)
