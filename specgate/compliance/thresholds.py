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
    """A threshold that a project states: `applied` where it is at least as strict as the catalogue's."""

    approximation: str
    key: str
    catalogue: fmpq
    stated: fmpq
    as_written: str
    applied: bool


@dataclass(frozen=True)
class Policy:
    """The thresholds that a project states."""

    stated: tuple[Threshold, ...]

    def in_force(self, approximation: str, condition: Condition) -> tuple[fmpq | None, str | None]:
        """Return the threshold of a condition and, where the project states one, what became of it in words."""
        for one in self.stated:
            if (one.approximation, one.key) == (approximation, condition.key):
                if one.applied:
                    return one.stated, f"tightened by the project to {one.as_written}"
                return (
                    condition.threshold,
                    f"the project's {one.as_written} is looser than the catalogue and not applied",
                )
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
    stated = evaluate(value, values)
    assert condition.threshold is not None
    return Threshold(name, key, condition.threshold, stated, value.as_written, condition.stricter(stated))
