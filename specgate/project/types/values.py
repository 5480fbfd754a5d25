"""Values: expressions wherever a quantity may stand, and the parameters that name them."""

from __future__ import annotations

from typing import Literal

from specgate.terms.expressions import Expression
from specgate.terms.places import Place
from specgate.terms.records import record


@record
class Value:
    """An expression wherever a quantity may stand, with where it comes from.

    as_written: the text of the file. source, tolerance: only where `{value, source, tolerance}` was written.
    """

    expression: Expression
    as_written: str
    place: Place
    source: str | None = None
    tolerance: Tolerance | None = None


@record
class Tolerance:
    """Deviations from the nominal value, each relative (unit %) or absolute; lower is <= 0 <= upper."""

    lower: Expression
    upper: Expression
    relative: bool
    as_written: str
    distribution: Literal["uniform", "triangular", "normal"] | None = None
    coverage_factor: Expression | None = None


@record
class Parameter:
    """A named value, global (`stroke`) or of a subsystem (`hoist_drive.lag`); `name` is the qualified name."""

    name: str
    value: Value
    formula: bool
    place: Place
    title: str | None = None
