"""A project's own thresholds for the conditions of approximations, tighter or looser than the catalogue's."""

from __future__ import annotations

from collections.abc import Iterator

from flint import fmpq

from specgate.approximations.approximation import Condition
from specgate.approximations.table import APPROXIMATIONS
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Project, Value
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Threshold:
    """A threshold that a project states in place of the catalogue's.

    looser: it lets in what the catalogue does not, for which no accuracy has been shown.
    """

    approximation: str
    key: str
    catalogue: fmpq
    stated: fmpq
    as_written: str
    looser: bool
    place: Place

    @property
    def words(self) -> str:
        """What the project has done."""
        return f"{'loosened' if self.looser else 'tightened'} by the project to {self.as_written}"


@record
class Policy:
    """The thresholds that a project states and that differ from the catalogue's."""

    stated: tuple[Threshold, ...]

    def own(self, approximation: str, condition: Condition) -> Threshold | None:
        """Return the project's own threshold of a condition, if it has one."""
        named = (one for one in self.stated if (one.approximation, one.key) == (approximation, condition.key))
        return next(named, None)


def policy(project: Project, values: Values) -> Policy:
    """Read the thresholds of a project. Raises Fault for a value that cannot be evaluated."""
    every = (
        _threshold(name, value, condition, values)
        for name, stated in project.approximations.items()
        for key, value in stated.items()
        for condition in _conditions(name, key)
    )
    return Policy(tuple(one for one in every if one.stated != one.catalogue))


def _conditions(approximation: str, key: str) -> Iterator[Condition]:
    row = APPROXIMATIONS.get(approximation)
    if row is not None:
        yield from (one for one in row.conditions if one.key == key and one.threshold is not None)


def _threshold(name: str, value: Value, condition: Condition, values: Values) -> Threshold:
    assert condition.threshold is not None
    stated = evaluate(value, values)
    return Threshold(
        name, condition.key, condition.threshold, stated, value.as_written, not condition.stricter(stated), value.place
    )
