"""Everything that the models under a criterion take for granted, each looked into once for its subject."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from specgate.analysis.analyses import Analyses, Missing
from specgate.compliance.model.fact import ModelAssumption
from specgate.compliance.model.validity import pedigrees, validities
from specgate.compliance.model.where import Place, blocks, places
from specgate.compliance.readings import Reading
from specgate.measures.measure import Arguments
from specgate.project.types import Project, Subject, Subsystem


class ModelAssumptions:
    """What the criteria of one project rest on."""

    def __init__(self, project: Project, analyses: Analyses) -> None:
        self._project, self._analyses = project, analyses

    def of(
        self, about: Subject, arguments: tuple[Arguments, Arguments], reading: Reading
    ) -> tuple[ModelAssumption, ...]:
        """Return what a criterion rests on. arguments, reading: with both decimals for pi."""
        loop = self._analyses.nominal.loops[about.loop]
        if isinstance(self._analyses.nominal.subject(about), Missing):
            return ()
        subsystems = [self._project.subsystems[name] for name in blocks(loop, about)]
        return tuple(self._found(about, subsystems, arguments, reading))

    def _found(
        self, about: Subject, subsystems: Sequence[Subsystem], arguments: tuple[Arguments, Arguments], reading: Reading
    ) -> Iterator[ModelAssumption]:
        on = about.loop if about.name is None else f"{about.loop}.{about.name}"
        known = self._analyses.nominal.values, self._analyses.again.values
        yield from pedigrees(subsystems, on)
        if any(one.valid_to is not None for one in subsystems):
            yield from validities(subsystems, on, self._places(about, arguments, reading), known)

    def _places(
        self, about: Subject, arguments: tuple[Arguments, Arguments], reading: Reading
    ) -> list[tuple[Place, Reading]]:
        """Return the frequencies that decide, each told with both decimals for pi."""
        nominal, again = self._analyses.nominal, self._analyses.again
        first = list(places(nominal, about, arguments[0], reading.answer))
        if again.loops[about.loop] is nominal.loops[about.loop] and arguments[0] == arguments[1]:
            return [(one, Reading.once(one.frequency)) for one in first]
        second = list(places(again, about, arguments[1], reading.again))
        if [one.what for one in first] != [one.what for one in second]:
            return [(one, Reading.once(one.frequency)) for one in first]
        return [(one, Reading(one.frequency, other.frequency)) for one, other in zip(first, second, strict=True)]
