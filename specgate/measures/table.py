"""The table of all measures of the format, in the order in which they are reported."""

from __future__ import annotations

from collections.abc import Mapping

from specgate.measures import (
    constants,
    errors,
    excursions,
    frequency,
    hidden,
    limits,
    margins,
    modes,
    origin,
    steady,
    times,
    values,
)
from specgate.measures.measure import Measure

_FAMILIES = (values, excursions, times, errors, origin, limits, steady, modes, hidden, constants, margins, frequency)

MEASURES: Mapping[str, Measure] = {row.name: row for family in _FAMILIES for row in family.ROWS}
"""Every measure by its name in the format; rows with `read` None are known but not answered by this version."""
