"""A project's own thresholds for the conditions of approximations: they may tighten a condition, never loosen it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from flint import fmpq

from specgate.approximations.approximation import Condition
from specgate.approximations.table import APPROXIMATIONS
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Project, Value


@dataclass(frozen=True)
class Threshold:
    """A threshold that a project states in place of the catalogue's."""

    approximation: str
    key: str
    catalogue: fmpq
    stated: fmpq
    as_written: str


@dataclass(frozen=True)
class Policy:
    """The thresholds that a project states; a looser one than the catalogue's has been refused when it was read."""

    stated: tuple[Threshold, ...]

    def in_force(self, approximation: str, condition: Condition) -> tuple[fmpq | None, str | None]:
        """Return the threshold of a condition and, where it is the project's own, that in words."""
        for one in self.stated:
            if (one.approximation, one.key) == (approximation, condition.key):
                return one.stated, f"tightened by the project to {one.as_written}"
        return condition.threshold, None


def policy(project: Project, values: Values) -> Policy:
    """Read the thresholds of a project. Raises Fault for a value that cannot be evaluated."""
    return Policy(
        tuple(
            _threshold(name, key, value, condition, values)
            for name, stated in project.approximations.items()
            for key, value in stated.items()
            for condition in _conditions(name, key)
        )
    )


def _conditions(approximation: str, key: str) -> Iterator[Condition]:
    row = APPROXIMATIONS.get(approximation)
    if row is not None:
        yield from (one for one in row.conditions if one.key == key and one.threshold is not None)


def _threshold(name: str, key: str, value: Value, condition: Condition, values: Values) -> Threshold:
    assert condition.threshold is not None
    return Threshold(name, key, condition.threshold, evaluate(value, values), value.as_written)
