"""Results to write, read and validate: of the rule cases, the examples and the broken inputs."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review, unusable
from specgate.review.types import Review, Unusable

Result = Callable[[Path], Review | Unusable]


@cache
def result_of(path: Path) -> Review | Unusable:
    loaded = load(path)
    return unusable(loaded) if isinstance(loaded, Problems) else review(loaded)


@pytest.fixture(scope="session")
def result() -> Result:
    """Return a function from the path of a project to its result, each computed once."""
    return result_of
