"""How a number of a piecewise response was proved, in plain values (see `specgate.response.record`)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from flint import arb, fmpq

from specgate.response.answers import Answer
from specgate.response.extremes import Extreme
from specgate.response.piecewise.patches import Ground
from specgate.response.record import rounded_up
from specgate.terms.precision import working_precision

GREATEST = "the greatest of what is taken at kinks and of summits in proved brackets; all patches elsewhere are lower"
LAST = "the last crossing of the band: beyond it a bound holds, and the search goes back from there piece by piece"
FIRST = "the first crossing of the level, from the start on, piece by piece"


def with_record(answer: Answer, ground: Ground, method: str, brackets: int, since: fmpq | None) -> Answer:
    """Return an enclosed answer with its record; since: the time (s) from which on a bound alone excludes it."""
    if answer.refine is None or answer.how is not None:
        return answer
    return replace(answer, how=lambda: _record(ground, method, brackets, since))


def recorded(extreme: Extreme, ground: Ground) -> Extreme:
    """Return an extreme with the record of its value and of its time."""
    value, time = (with_record(answer, ground, GREATEST, 1, None) for answer in (extreme.value, extreme.time))
    return Extreme(value, time)


def _record(ground: Ground, method: str, brackets: int, since: fmpq | None) -> Mapping[str, object]:
    found: dict[str, object] = {"method": method, "bits_of_modes": ground.bits, "brackets": brackets}
    if since is not None:
        with working_precision(ground.bits):
            found["searched_until"] = rounded_up(arb(since))
    return found
