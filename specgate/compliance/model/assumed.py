"""Everything that the models under a criterion take for granted, each looked into once for its subject."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specgate.analysis.analyses import Analyses, Missing
from specgate.analysis.late_fractions import LateFraction
from specgate.analysis.through import through
from specgate.approximations.opened import OpenedLoop
from specgate.compliance.model.fact import ModelAssumption, greatest
from specgate.compliance.model.integrators import OF_LASTING_ERRORS, quasi_integrator, slower_than_any, slowest_pole
from specgate.compliance.model.late import Late, Where, fraction_of, stand_in, written_dead_time
from specgate.compliance.model.tails import hidden_slow_mode, near_cancellation
from specgate.compliance.model.validity import pedigrees, validities
from specgate.compliance.model.where import Place, blocks, crossovers, places
from specgate.compliance.readings import Reading
from specgate.measures.measure import Arguments
from specgate.project.types import Project, Subject, Subsystem
from specgate.response.answers import Answer
from specgate.systems.blocks import Block

Both = tuple[Arguments, Arguments]
"""The arguments of a criterion with both decimals for pi."""


class ModelAssumptions:
    """What the criteria of one project rest on."""

    def __init__(self, project: Project, analyses: Analyses) -> None:
        self._project, self._analyses = project, analyses
        self._crossovers: dict[tuple[str, str], Where | None] = {}
        self._opened: dict[tuple[str, str], tuple[OpenedLoop | None, OpenedLoop | None]] = {}
        self._breaks: dict[str, tuple[Answer, ...]] = {}
        self._fractions: dict[tuple[str, str], LateFraction | None] = {}

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
        on = named(about)
        known = self._analyses.nominal.values, self._analyses.again.values
        yield from pedigrees(subsystems, on)
        if any(one.valid_to is not None for one in subsystems):
            yield from validities(subsystems, on, self._places(about, arguments, reading), known)
        loop = self._analyses.nominal.loops[about.loop]
        found = [
            hidden_slow_mode(loop, about, arguments[0]),
            near_cancellation(loop, about, arguments[0], reading),
            *(self._late(about, one, arguments, reading) for one in subsystems),
            *(self._slow(about, one, arguments) for one in subsystems),
        ]
        yield from (one for one in found if one is not None)

    def _late(self, about: Subject, one: Subsystem, arguments: Both, reading: Reading) -> ModelAssumption | None:
        """Say what a block stands for, or that it holds a dead time that is written as a fraction."""
        block = self._block(about.loop, one.name)
        if block is None or (one.stands_for is None and self._fraction(about.loop, one.name) is None):
            return None
        known = self._analyses.nominal.values, self._analyses.again.values
        late = Late(one, block, named(about), self._compared(about, one.name, arguments, reading), known)
        return stand_in(late) or written_dead_time(late, arguments[0].measure)

    def _slow(self, about: Subject, one: Subsystem, arguments: Both) -> ModelAssumption | None:
        """Say of a block that it is counted on as an integrator and is none."""
        block = None if arguments[0].measure not in OF_LASTING_ERRORS else self._block(about.loop, one.name)
        pole = None if block is None else slowest_pole(block)
        if pole is None or not slower_than_any(pole, self._declared(about.loop)):
            return None
        crossover = self._crossover(about.loop, one.name)
        opened = None if crossover is None else self._through(about.loop, one.name)[0]
        if crossover is None or opened is None:
            return None
        return quasi_integrator(one, pole, named(about), opened, crossover.frequency)

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
        decided = [one for one in self._places(about, arguments, reading) if one[1].settled.absent is None]
        highest = None if not decided else greatest([one.answer for _, one in decided])
        return next((Where(place.what, one) for place, one in decided if one.answer is highest), None)

    def _declared(self, loop: str) -> tuple[Answer, ...]:
        """Return the gain crossovers of the declared breaks of a loop, where they have any."""
        if loop not in self._breaks:
            opened = self._analyses.nominal.loops[loop].opened.values()
            found = (_highest_crossover(one) for one in opened)
            self._breaks[loop] = tuple(one for one in found if one is not None)
        return self._breaks[loop]

    def _crossover(self, loop: str, subsystem: str) -> Where | None:
        """Return the highest gain crossover of the loop through a block; searched once."""
        key = loop, subsystem
        if key not in self._crossovers:
            first, second = (_highest_crossover(one) for one in self._through(loop, subsystem))
            both = None if first is None or second is None else Reading(first, second)
            what = f"the crossover of the loop through {subsystem}"
            self._crossovers[key] = None if both is None else Where(what, both)
        return self._crossovers[key]

    def _through(self, loop: str, subsystem: str) -> tuple[OpenedLoop | None, OpenedLoop | None]:
        """Return the loop through a block with both decimals for pi (the same object where pi has no part in it)."""
        key = loop, subsystem
        if key not in self._opened:
            nominal, again = self._analyses.nominal.loops[loop], self._analyses.again.loops[loop]
            first = through(nominal, subsystem)
            self._opened[key] = first, first if again is nominal else through(again, subsystem)
        return self._opened[key]

    def _block(self, loop: str, subsystem: str) -> Block | None:
        """Return a subsystem as a block in s, with the nominal values."""
        instances = self._analyses.nominal.loops[loop].solution.wiring.instances
        found = (one.block for one in instances if one.block.name == subsystem)
        return next((one for one in found if isinstance(one, Block)), None)

    def _fraction(self, loop: str, subsystem: str) -> LateFraction | None:
        """Return the fraction in a block that stands for a dead time; looked for once."""
        key = loop, subsystem
        if key not in self._fractions:
            block = self._block(loop, subsystem)
            self._fractions[key] = None if block is None else fraction_of(block)
        return self._fractions[key]


def named(about: Subject) -> str:
    """Name what a criterion is about."""
    return about.loop if about.name is None else f"{about.loop}.{about.name}"


def _highest_crossover(opened: OpenedLoop | None) -> Answer | None:
    """Return the highest gain crossover that is known, not that at zero frequency, where no phase is to be compared."""
    every = () if opened is None else crossovers(opened)
    found = [one for one in every if one.absent is None and one.exact != 0]
    return greatest(found) if found else None
