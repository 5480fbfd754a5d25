"""Everything that the models under a criterion take for granted, each looked into once for its subject."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specgate.analysis.analyses import Analyses, LoopAnalysis, Missing, Study
from specgate.analysis.through import through
from specgate.approximations.figures import SHOWN
from specgate.compliance.model.fact import ModelAssumption
from specgate.compliance.model.late import Late, Where, fraction_of, stand_in, written_dead_time
from specgate.compliance.model.validity import pedigrees, validities
from specgate.compliance.model.where import Place, blocks, places
from specgate.compliance.readings import Reading
from specgate.measures.measure import Arguments
from specgate.project.types import Project, Subject, Subsystem
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.systems.blocks import Block

Both = tuple[Arguments, Arguments]
"""The arguments of a criterion with both decimals for pi."""


class ModelAssumptions:
    """What the criteria of one project rest on."""

    def __init__(self, project: Project, analyses: Analyses) -> None:
        self._project, self._analyses = project, analyses
        self._crossovers: dict[tuple[str, str], Where | None] = {}

    def of(self, about: Subject, arguments: Both, reading: Reading) -> tuple[ModelAssumption, ...]:
        """Return what a criterion rests on. reading: what was read for it."""
        loop = self._analyses.nominal.loops[about.loop]
        if isinstance(self._analyses.nominal.subject(about), Missing):
            return ()
        subsystems = [self._project.subsystems[name] for name in blocks(loop, about)]
        return tuple(self._found(about, subsystems, arguments, reading))

    def _found(
        self, about: Subject, subsystems: Sequence[Subsystem], arguments: Both, reading: Reading
    ) -> Iterator[ModelAssumption]:
        on = about.loop if about.name is None else f"{about.loop}.{about.name}"
        known = self._analyses.nominal.values, self._analyses.again.values
        yield from pedigrees(subsystems, on)
        if any(one.valid_to is not None for one in subsystems):
            yield from validities(subsystems, on, self._places(about, arguments, reading), known)
        loop = self._analyses.nominal.loops[about.loop]
        for one in subsystems:
            block = _block(loop, one.name)
            if block is None or (one.stands_for is None and fraction_of(block) is None):
                continue
            late = Late(one, block, on, self._compared(about, one.name, arguments, reading), known)
            found = stand_in(late), written_dead_time(late, arguments[0].measure)
            yield from (each for each in found if each is not None)

    # --- where ---------------------------------------------------------------------------------------------------

    def _places(self, about: Subject, arguments: Both, reading: Reading) -> list[tuple[Place, Reading]]:
        """Return the frequencies that decide, each told with both decimals for pi."""
        nominal, again = self._analyses.nominal, self._analyses.again
        first = list(places(nominal, about, arguments[0], reading.answer))
        if again.loops[about.loop] is nominal.loops[about.loop] and arguments[0] == arguments[1]:
            return [(one, Reading.once(one.frequency)) for one in first]
        second = list(places(again, about, arguments[1], reading.again))
        if [one.what for one in first] != [one.what for one in second]:
            return [(one, Reading.once(one.frequency)) for one in first]
        return [(one, Reading(one.frequency, other.frequency)) for one, other in zip(first, second, strict=True)]

    def _compared(self, about: Subject, subsystem: str, arguments: Both, reading: Reading) -> Where | None:
        """Return where the phase of a block is compared: at its crossover, else at the highest place that decides."""
        found = self._crossover(about.loop, subsystem)
        if found is not None:
            return found
        decided = self._places(about, arguments, reading)
        highest = None if not decided else _greatest([one.answer for _, one in decided])
        return next((Where(place.what, one) for place, one in decided if one.answer is highest), None)

    def _crossover(self, loop: str, subsystem: str) -> Where | None:
        """Return the highest gain crossover of the loop through a block; searched once."""
        key = loop, subsystem
        if key not in self._crossovers:
            nominal, again = self._analyses.nominal, self._analyses.again
            first = _highest_crossover(nominal, loop, subsystem)
            second = first if again.loops[loop] is nominal.loops[loop] else _highest_crossover(again, loop, subsystem)
            both = None if first is None or second is None else Reading(first, second)
            self._crossovers[key] = (
                None if both is None else Where(f"the crossover of the loop through {subsystem}", both)
            )
        return self._crossovers[key]


def _block(loop: LoopAnalysis, subsystem: str) -> Block | None:
    """Return a subsystem as a block in s, with the nominal values."""
    found = (one.block for one in loop.solution.wiring.instances if one.block.name == subsystem)
    return next((one for one in found if isinstance(one, Block)), None)


def _highest_crossover(study: Study, loop: str, subsystem: str) -> Answer | None:
    opened = through(study.loops[loop], subsystem)
    if opened is None:
        return None
    try:
        found = [one.frequency for one in opened.gain_crossings if one.frequency.absent is None]
    except OutOfWork:
        return None
    return _greatest(found) if found else None


def _greatest(answers: Sequence[Answer]) -> Answer:
    """Return the greatest of some numbers, the first of those that cannot be told apart."""
    balls = [one.enclose(SHOWN) for one in answers]
    return next(one for one, own in zip(answers, balls, strict=True) if not any(other > own for other in balls))
