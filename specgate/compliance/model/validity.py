"""Up to which frequency the models of blocks hold, and what kind of knowledge they are.

A model that holds up to a frequency says nothing of what is above it. What decides a criterion must lie below: the gain
crossovers of a break and where its margin is read; of a response its bandwidth, its resonance peak and every mode that
counts in it; the frequency that is asked about. One above makes the standing out of range.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence

from specgate.compliance.model.fact import RADIAN_PER_SECOND, UNTOLD, Figured, ModelAssumption, exceeds
from specgate.compliance.model.where import Place
from specgate.compliance.readings import Reading
from specgate.compliance.units import written_unit
from specgate.compliance.wording import apart
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Subsystem
from specgate.response.answers import Answer
from specgate.terms.verdicts import Standing, Trilean

_PEDIGREES = {
    "identified": "identified from measurements",
    "physical_law": "derived from physical laws",
    "data_sheet": "taken from a data sheet",
    "assumed": "assumed: nobody has measured it, and no law or data sheet is named",
}


def pedigrees(subsystems: Iterable[Subsystem], on: str) -> Iterator[ModelAssumption]:
    """Yield what kind of knowledge each model is, where the project says so."""
    for one in subsystems:
        said = one.pedigree
        if said is not None:
            known = Trilean.UNKNOWN if said.kind == "assumed" else Trilean.YES
            words = f"the model of {one.name} is {_PEDIGREES[said.kind]}"
            words += f" ({said.source})" if said.source else ""
            yield ModelAssumption("pedigree", on, one.name, known, Standing.SOUND, words, said.place)


def validities(
    subsystems: Iterable[Subsystem], on: str, found: Sequence[tuple[Place, Reading]], known: tuple[Values, Values]
) -> Iterator[ModelAssumption]:
    """Yield of each model with a limit whether everything that decides lies below it.

    found: places with their frequencies, with both decimals for pi. known: the values of both.
    """
    for one in subsystems:
        if one.valid_to is not None:
            yield _validity(one, on, found, known)


def _validity(
    subsystem: Subsystem, on: str, found: Sequence[tuple[Place, Reading]], known: tuple[Values, Values]
) -> ModelAssumption:
    stated = subsystem.valid_to
    assert stated is not None
    first, second = (Answer.of_exact(evaluate(stated, values, subsystem.name)) for values in known)
    limit = Reading(first, second)
    unit = written_unit(stated.expression, known[0]) or RADIAN_PER_SECOND
    decided = [(place, reading, exceeds(reading, limit)) for place, reading in found]
    above = [(place, reading) for place, reading, holds in decided if holds is Trilean.YES]
    untold = [place for place, _, holds in decided if holds is Trilean.UNKNOWN]
    figures = (Figured("valid_to", limit, unit), *(Figured(place.what, reading, unit) for place, reading in found))
    if above:
        place, reading = above[0]
        at, to = apart([reading.in_unit(unit), limit.in_unit(unit)], unit)
        words = f"{place.what} is at {at}, and the model of {subsystem.name} holds to {to}"
        words += f"; {len(above) - 1} more above it" if len(above) > 1 else ""
        state = Trilean.NO, Standing.OUT_OF_RANGE
    elif untold:
        words = f"whether {untold[0].what} is above {stated.as_written}, to which the model of {subsystem.name} holds: "
        absent = untold[0].frequency.absent
        words += UNTOLD if absent is None else absent.reason
        state = Trilean.UNKNOWN, Standing.INCONCLUSIVE
    else:
        words = f"nothing that decides is above {stated.as_written}, to which the model of {subsystem.name} holds"
        state = Trilean.YES, Standing.SOUND
    return ModelAssumption("valid_to", on, subsystem.name, *state, words, stated.place, figures)
